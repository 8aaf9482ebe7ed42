"""A design against what it could be: other resonances, other ways to feed it, other loads."""
