"""Canonical data and digests; later attachments, signatures and verification."""
