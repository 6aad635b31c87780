"""What the body does: materials, mounts, the eigen-solve, names and theory."""
