"""The result of a modal solve."""

from __future__ import annotations

from dataclasses import dataclass
from html import escape

import numpy as np

from ...geometry.anatomy import Anatomy
from ...geometry.mesh import Mesh
from .case import Case

#: Names of the five shares of kinetic energy of bar-like bodies, in order.
SHARES = ("flatwise bending", "edgewise bending", "torsion", "axial", "distortion")


@dataclass(frozen=True, kw_only=True, slots=True)
class Mode:
    """One elastic mode. What does not apply is None, never 0. Positive cents are sharp.

    Field names and units are those of ``modes.json``.

    Attributes
    ----------
    index : from 1, by frequency
    name : unique within a result
    mixed : no share reaches one half
    pair : name of the other mode of a pair of equal modes (within 0.5 cent)
    frequency_hz : best value
    raw_hz : the finite-element value
    mesh_error_cents : how sharp `raw_hz` is of the converged value
    note, cents_from_note : nearest note of equal temperament, and the distance
    ratio : to the reference mode
    shares : share name -> 0..1, sums to 1; bar-like bodies only
    prong_balance : +1 prongs together ... -1 opposed
    root_share : share of kinetic energy outside prongs and tines
    tine_shares : share of kinetic energy of each prong or tine, by number
    nodal_points_mm : where the centre line stands still, from the first end
    modal_mass_g : for a shape scaled to 1 at the point that moves most
    quality_factor, t60_s, decay_basis : null until decay is modelled
    theory_hz, theory : beam, ring or plate formula, and its name and source
    target_hz, cents_to_target : from the case's targets
    measured_hz, cents_to_measured : from the case's measured rows (model minus measured)
    nearest_index, nearest_gap_cents : the mode nearest in frequency, its own pair left out
    residual : ||K u - lambda M u|| / ||K u||
    """

    index: int
    name: str
    mixed: bool
    pair: str | None
    frequency_hz: float
    raw_hz: float
    mesh_error_cents: float | None
    note: str
    cents_from_note: float
    ratio: float
    shares: dict[str, float] | None
    prong_balance: float | None
    root_share: float | None
    tine_shares: tuple[float, ...] | None
    nodal_points_mm: tuple[float, ...]
    modal_mass_g: float
    quality_factor: float | None
    t60_s: float | None
    decay_basis: str | None
    theory_hz: float | None
    theory: str | None
    target_hz: float | None
    cents_to_target: float | None
    measured_hz: float | None
    cents_to_measured: float | None
    nearest_index: int | None
    nearest_gap_cents: float | None
    residual: float


@dataclass(frozen=True, kw_only=True, slots=True)
class MeshFacts:
    """Counts and sizes of the mesh that was solved.

    Attributes
    ----------
    nodes, cells, unknowns : counts
    size_mm : element size asked for; the largest where it differs from place to place
    mass_g, volume_mm3 : of the part
    volume_error_ppm, area_error_ppm : by how much the mesh's volume and surface exceed
        those of the exact body, in millionths; None for a body that is a mesh itself
    """

    nodes: int
    cells: int
    unknowns: int
    size_mm: float
    mass_g: float
    volume_mm3: float
    volume_error_ppm: float | None = None
    area_error_ppm: float | None = None


@dataclass(frozen=True, kw_only=True, slots=True)
class SolveFacts:
    """How the solve went.

    Attributes
    ----------
    direct_solver : name of the factorisation used
    missing_modes : modes proved to be missing; None where not counted
    rigid_modes : rigid-body modes found and left out
    seconds : stage -> s; stages mesh, assemble, factor, eigen (counting included),
        mesh_error, names, total; with an accuracy also adapt, all meshes but the last
    peak_mb : peak memory of this process, MB
    meshes : meshes solved, more than one where an accuracy was asked for
    """

    direct_solver: str
    missing_modes: int | None
    rigid_modes: int
    seconds: dict[str, float]
    peak_mb: float
    meshes: int = 1


@dataclass(frozen=True, eq=False, kw_only=True, slots=True)
class Modes:
    """Elastic modes of a part, by ascending frequency.

    Attributes
    ----------
    case : Case
    mesh : Mesh
    anatomy : Anatomy
    modes : the m modes
    shapes : (m, n, 3) float, 1/sqrt(kg)
        Mass-normalised displacement at every node of the mesh.
    mesh_facts, solve_facts : see their records
    warnings : sentences for people, such as modes close enough to beat
    """

    case: Case
    mesh: Mesh
    anatomy: Anatomy
    modes: tuple[Mode, ...]
    shapes: np.ndarray
    mesh_facts: MeshFacts
    solve_facts: SolveFacts
    warnings: tuple[str, ...] = ()

    @property
    def frequencies(self) -> np.ndarray:
        """Best frequencies (m,), Hz, ascending."""
        return np.array([mode.frequency_hz for mode in self.modes])

    @property
    def names(self) -> tuple[str, ...]:
        """Names of the modes, in order."""
        return tuple(mode.name for mode in self.modes)

    def __len__(self) -> int:
        return len(self.modes)

    def __str__(self) -> str:
        """Return a plain table: number, name, Hz, note, cents, ratio."""
        width = max([4, *map(len, self.names)])
        lines = [f"{'':>3} {'mode':<{width}} {'Hz':>10} {'note':>5} {'cents':>6} {'ratio':>7}"]
        lines += [
            f"{m.index:>3} {m.name:<{width}} {m.frequency_hz:>10.2f} {m.note:>5} "
            f"{m.cents_from_note:>+6.1f} {m.ratio:>7.4f}"
            for m in self.modes
        ]
        return "\n".join(lines)

    def _repr_html_(self) -> str:
        """Return the table for a notebook."""
        head = "".join(f"<th>{h}</th>" for h in ("", "mode", "Hz", "note", "cents", "ratio"))
        rows = "".join(
            f"<tr><td>{m.index}</td><td style='text-align:left'>{escape(m.name)}</td>"
            f"<td>{m.frequency_hz:.2f}</td><td>{m.note}</td>"
            f"<td>{m.cents_from_note:+.1f}</td><td>{m.ratio:.4f}</td></tr>"
            for m in self.modes
        )
        return f"<table><thead><tr>{head}</tr></thead><tbody>{rows}</tbody></table>"
