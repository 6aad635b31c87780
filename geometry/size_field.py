"""The size field record: how large cells are to be at each place of a body."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from .errors import InputError


@dataclass(frozen=True, eq=False, kw_only=True, slots=True)
class SizeField:
    """Element sizes wanted at the corners of tetrahedra that fill a body; mm.

    Between the corners the size is linear, outside it is that of the nearest corner.
    What short curves, round faces and thin places ask for is kept where it is finer.

    Attributes
    ----------
    points : (n, 3) float, mm
    cells : (c, 4) int
        Corners of each tetrahedron.
    sizes : (n,) float, mm
    """

    points: np.ndarray
    cells: np.ndarray
    sizes: np.ndarray

    def __post_init__(self) -> None:
        """Raise InputError if the arrays do not fit together or a size is not positive."""
        n = len(self.points)
        shapes = np.shape(self.points) == (n, 3) and np.shape(self.sizes) == (n,)
        if not (shapes and np.ndim(self.cells) == 2 and np.shape(self.cells)[1] == 4):
            raise InputError("the arrays of a size field must be (n, 3), (c, 4) and (n,)")
        if not len(self.cells) or self.cells.min() < 0 or self.cells.max() >= n:
            raise InputError("the cells of a size field must point at its points")
        if not (np.all(np.isfinite(self.sizes)) and np.all(self.sizes > 0.0)):
            raise InputError("is out of range", key="size_field.sizes", allowed="over 0 mm")
