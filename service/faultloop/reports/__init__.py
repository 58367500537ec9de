"""Drawings and documents made from answers and bands: data in, SVG bytes or HTML out."""
