"""Geometry: parametric shapes to nodes and members."""
