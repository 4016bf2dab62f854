"""Operator and domain to matrices: elements, their meshes, and what the coefficients do at the ends."""
