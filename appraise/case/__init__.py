"""The case: its file and its hours, read and checked."""
