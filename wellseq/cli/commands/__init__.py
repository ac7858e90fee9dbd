"""One file per command; a command's name is the name of its file."""
