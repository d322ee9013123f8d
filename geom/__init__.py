"""Shapes as numbers: millimetres and radians; no file, no material."""
