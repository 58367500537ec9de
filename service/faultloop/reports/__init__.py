"""Drawings made from answers and bands: data in, SVG bytes out."""
