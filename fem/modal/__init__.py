"""Natural frequencies and mode shapes."""
