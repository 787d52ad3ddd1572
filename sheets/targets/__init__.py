"""Settings and their derivations."""
