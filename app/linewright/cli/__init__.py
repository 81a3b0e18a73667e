"""The command line: one module per command; nothing here loads Qt."""
