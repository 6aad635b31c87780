"""Beam, ring and plate formulas to set beside the three-dimensional result."""
