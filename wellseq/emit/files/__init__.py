"""One file per kind of file that a published folder holds; `contents` finds them."""
