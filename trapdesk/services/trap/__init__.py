"""A trap and its parts as circuits."""
