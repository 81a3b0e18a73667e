"""What is known about one spectrum: the session, its edits and its file."""
