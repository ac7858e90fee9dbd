"""A case as pictures: a page for a browser, stills, strips for a terminal, for notebooks."""
