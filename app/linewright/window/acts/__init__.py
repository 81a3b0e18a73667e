"""What a person can do, one module a subject; each act takes the workbench."""
