"""The workshop: what the wing file states, what is decided from it, what is drawn."""
