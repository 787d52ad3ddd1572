"""Sentences from templates/, and the rules that they keep."""
