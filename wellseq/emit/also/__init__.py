"""Further forms of every block's table, made on request; each file here is one of them."""
