"""Energy sources, stored energy and trapped volumes."""
