"""Drawings, meshes and tables to bytes; one module for each format."""
