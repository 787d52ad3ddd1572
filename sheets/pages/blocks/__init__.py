"""One module a block family: each turns a block into pieces of a width."""
