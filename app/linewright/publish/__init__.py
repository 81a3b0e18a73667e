"""Tables and figures made from a session."""
