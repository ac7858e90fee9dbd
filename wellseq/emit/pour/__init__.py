"""Forms in which a block is poured out at a fixed rate; each file here is one of them."""
