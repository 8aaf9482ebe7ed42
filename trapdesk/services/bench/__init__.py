"""A part by itself on the bench: computed, or read off a meter."""
