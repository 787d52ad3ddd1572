"""The append-only store of issued packs: events, the revisions that follow from them, and their chain."""
