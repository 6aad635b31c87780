"""Sparse symmetric direct solvers behind one protocol, each in its own module."""
