"""Drawings, meshes and tables to bytes; one module for each format."""

from . import home

home.provide()
