"""The panels of the window; none knows another, all share the workbench."""
