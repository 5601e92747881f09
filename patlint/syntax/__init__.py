"""Pattern text to tree and back: Python's `re` dialect. Imports nothing of patlint but its limits."""
