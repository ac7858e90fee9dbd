"""One file per form of findings; a form's name is the name of its file."""
