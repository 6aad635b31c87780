"""Thin slices across limbs, each with its six rigid motions.

A bar-like body is cut into thin slices across its axis: the root, and each prong
and tine for itself. The motion of a slice is projected, in the mass inner
product about its centroid, on its six rigid motions; what is left is distortion
of the section.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np
from scipy.sparse import csc_array

from ....geometry.anatomy import Region
from .motion import Motion

#: Slices over the length of the body.
SLICES = 48

#: A slice is at least this many cells thick, or it holds too few points to tell
#: a rigid motion from any other.
_THINNEST = 0.6

#: Columns of translations (along, across, through) and of rotations about them
#: that make up each rigid share: flatwise, edgewise, torsion, axial.
_TRANSLATION = (2, 1, None, 0)
_ROTATION = (1, 2, 0, None)


@dataclass(frozen=True, eq=False, kw_only=True, slots=True)
class Slices:
    """Slices of a body and what m modes do to them.

    Amplitudes are scaled so that their squares are kinetic energies: the sum of
    all rigid ones and of the distortion of a mode is 1.

    Attributes
    ----------
    limb : (s,) int
        0 for the root, else the place of the slice's region counted from 1.
    mass : (s,) float
        Volume.
    centre : (s, 3) float, m
    shift : (m, s, 3) float
        Mean displacement along, across, through.
    turn : (m, s, 3) float
        Rotation about the three axes, rad per m of shift.
    translation, rotation : (m, s, 3) float
        Energy amplitudes of the six rigid motions.
    energy : (limbs, m, m) float
        Kinetic energy products of all modes over the root and each region.
    """

    limb: np.ndarray
    mass: np.ndarray
    centre: np.ndarray
    shift: np.ndarray
    turn: np.ndarray
    translation: np.ndarray
    rotation: np.ndarray
    energy: np.ndarray

    def amplitudes(self, share: int) -> np.ndarray:
        """Return (m, s, 1 or 2): amplitudes of a rigid share, in the order of `SHARES`."""
        parts = []
        if (column := _TRANSLATION[share]) is not None:
            parts.append(self.translation[..., column])
        if (column := _ROTATION[share]) is not None:
            parts.append(self.rotation[..., column])
        return np.stack(parts, axis=-1)

    def product(self, share: int) -> np.ndarray:
        """Return (m, m): energy products of all modes in one rigid share."""
        flat = self.amplitudes(share).reshape(len(self.shift), -1)
        return flat @ flat.T

    def shares(self, limb: int | None = None) -> np.ndarray:
        """Return (m, 5) shares in the order of `SHARES`, of the body or of one limb's energy."""
        chosen = slice(None) if limb is None else self.limb == limb
        rigid = [(self.amplitudes(k)[:, chosen] ** 2).sum(axis=(1, 2)) for k in range(4)]
        energy = self.energy if limb is None else self.energy[limb : limb + 1]
        total = np.einsum("gii->i", energy)
        parts = np.stack([*rigid, total - sum(rigid)], axis=1)
        parts = np.maximum(parts, 0.0)  # round-off in the distortion of a rigid section
        whole = parts.sum(axis=1, keepdims=True)
        return parts / np.where(whole > 0.0, whole, 1.0)

    def turned(self, turn: np.ndarray) -> Slices:
        """Return the slices of the modes `turn` (m, m) makes of these."""

        def mixed(values: np.ndarray) -> np.ndarray:
            return np.tensordot(turn, values, 1)

        return replace(
            self,
            shift=mixed(self.shift),
            turn=mixed(self.turn),
            translation=mixed(self.translation),
            rotation=mixed(self.rotation),
            energy=turn @ self.energy @ turn.T,
        )


def cut(motion: Motion, regions: Sequence[Region]) -> Slices:
    """Return the slices of a body across its first axis, root and regions apart."""
    points = motion.points
    limb_of = np.zeros(len(points), int)
    for number, region in enumerate(regions, 1):
        limb_of[region.contains(points)] = number
    x = points[:, 0]
    step = max((motion.high[0] - motion.low[0]) / SLICES, _THINNEST * motion.cell_size)
    slice_of = np.zeros(len(points), int)
    limb: list[int] = []
    for number in range(len(regions) + 1):
        chosen = limb_of == number
        if not chosen.any():
            continue
        low, high = x[chosen].min(), x[chosen].max()
        count = max(1, round((high - low) / step))
        place = (x[chosen] - low) * (count / max(high - low, 1e-300))
        slice_of[chosen] = len(limb) + np.minimum(place.astype(int), count - 1)
        limb += [number] * count
    # A slice without a single point (a gap in the root between limbs) is dropped.
    used, slice_of = np.unique(slice_of, return_inverse=True)
    limb_at = np.asarray(limb)[used]
    return _project(motion, slice_of, limb_at, limb_of, len(regions) + 1)


def _project(
    motion: Motion, slice_of: np.ndarray, limb: np.ndarray, limb_of: np.ndarray, limbs: int
) -> Slices:
    points, weights, s = motion.points, motion.weights, len(limb)

    def total(values: np.ndarray) -> np.ndarray:
        return np.bincount(slice_of, values, minlength=s)

    mass = total(weights)
    centre = np.stack([total(weights * points[:, k]) / mass for k in range(3)], axis=1)
    arm = points - centre[slice_of]
    second = np.empty((s, 3, 3))
    for i in range(3):
        for j in range(i, 3):
            second[:, i, j] = second[:, j, i] = total(weights * arm[:, i] * arm[:, j])
    inertia = np.trace(second, axis1=1, axis2=2)[:, None, None] * np.eye(3) - second

    # Rows of one slice: its momentum, then its first moments with the three arms.
    rows = slice_of[:, None] + s * np.arange(4)
    values = weights[:, None] * np.concatenate([np.ones((len(points), 1)), arm], axis=1)

    def functionals(low: int, high: int) -> csc_array:
        ends = 4 * np.arange(high - low + 1)
        return csc_array(
            (values[low:high].ravel(), rows[low:high].ravel(), ends), shape=(4 * s, high - low)
        )

    linear, energy = motion.sums(functionals, limb_of)
    energy = energy.sum(axis=1)
    energy = np.concatenate([energy, np.zeros((limbs - len(energy), *energy.shape[1:]))])
    scale = np.sqrt(np.einsum("gii->i", energy))
    scale = np.where(scale > 0.0, scale, 1.0)
    linear = linear.reshape(motion.count, 4, s, 3) / scale[:, None, None, None]
    momentum, first = linear[:, 0], linear[:, 1:]  # first: (m, arm, s, component)
    spin = np.stack(
        [
            first[:, 1, :, 2] - first[:, 2, :, 1],
            first[:, 2, :, 0] - first[:, 0, :, 2],
            first[:, 0, :, 1] - first[:, 1, :, 0],
        ],
        axis=2,
    )
    # The square root of the inertia splits the spin's energy over the three axes
    # even where they are not principal ones: parts stay positive and add up.
    half = _inverse_root(inertia)
    rotation = np.einsum("sij,msj->msi", half, spin)
    return Slices(
        limb=limb,
        mass=mass,
        centre=centre,
        shift=momentum / mass[:, None],
        turn=np.einsum("sij,msj->msi", half, rotation),
        translation=momentum / np.sqrt(mass)[:, None],
        rotation=rotation,
        energy=energy / np.outer(scale, scale),
    )


def _inverse_root(inertia: np.ndarray) -> np.ndarray:
    """Return the inverse square roots of symmetric matrices (s, 3, 3); 0 where singular."""
    values, vectors = np.linalg.eigh(inertia)
    sound = values > 1e-9 * values[:, -1:]
    factor = np.where(sound, 1.0 / np.sqrt(np.where(sound, values, 1.0)), 0.0)
    return np.einsum("sik,sk,sjk->sij", vectors, factor, vectors)
