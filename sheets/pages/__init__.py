"""Document values, placed boxes, and reportlab's drawing of them."""
