"""What the body is: shape families, imported bodies, named faces, meshes."""
