"""Faces: the rows that present the figures, the command line, the build sheet and the desk."""
