"""The panes of the desk, a file each."""
