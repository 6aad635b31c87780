"""Solid modelling and meshing steps; each takes the kernel's handle as its first argument.

Only `geometry.kernel` imports the CAD library. These modules are its parts, kept
apart because each does one thing: profiles to faces, records to volumes, names
of faces, local element sizes, arrays of the finished mesh.
"""
