"""Replays a procedure: it shares the model with the search, never the search itself."""
