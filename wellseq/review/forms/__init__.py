"""One file per form of a comparison; a form's name is the name of its file."""
