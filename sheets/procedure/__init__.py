"""The search for test states, the derived order, and the steps."""
