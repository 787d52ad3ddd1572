"""From a procedure in words to the document values of a pack."""
