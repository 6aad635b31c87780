"""The discrete problem of a case: stiffness, mass, supports, rigid motions."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np
import scipy.sparse as sp

from ...geometry.errors import InputError
from ...geometry.mesh import Mesh
from ...geometry.selection import select
from ...geometry.selector import Selector
from .assembly import Matrices, assemble, symmetric
from .attachment import patch_mass
from .case import Case
from .constraint import Constraint, Held, hold_axes, hold_normals, make_constraint, mend_normals
from .material import Material
from .mount import AttachedMass, Hold, Mount
from .pattern import Pattern
from .reduction import reduce_blocks, scalar_blocks
from .rigid import rigid_basis, rigid_motions
from .surface import facet_entries, spread_mass, spring_bed

#: Temperature at which the values of a material hold, degrees C.
REFERENCE_TEMPERATURE = 20.0


@dataclass(frozen=True, eq=False, kw_only=True, slots=True)
class System:
    """K u = lambda M u of a body with its supports.

    Vectors live on all nodes, (3n, k), component 3 node + direction, and obey the
    supports. Matrices to be factorised live on the m nodes that can move
    (`constraint` goes between the two).

    Attributes
    ----------
    mesh : Mesh
        At the temperature of the case.
    pattern : Pattern
    stiffness : (3m, 3m) bsr, N/m
        Upper triangle of T^T K T, springs included, with held directions pinned; see
        `reduction.reduce_blocks`.
    mass : (n, n) csr, kg
        Mass matrix of one direction, attached masses included; M is three of it.
    constraint : Constraint
    rigid : (3n, r) float, 1/sqrt(kg)
        Mass-orthonormal rigid motions that supports and springs leave.
    body_mass, attached_mass : kg
    wave_speed : m/s
        Of axial waves; scales shifts.
    material : Material
        At the temperature of the case.
    beds : (facets (k, 6), normal, tangential stiffness in N/m3) of each spring bed
    """

    mesh: Mesh
    pattern: Pattern
    stiffness: sp.bsr_matrix
    mass: sp.csr_matrix
    constraint: Constraint
    rigid: np.ndarray
    body_mass: float
    attached_mass: float
    wave_speed: float
    material: Material
    beds: tuple[tuple[np.ndarray, float, float], ...] = ()

    @property
    def unknowns(self) -> int:
        """Number of unknowns."""
        return self.constraint.unknowns

    def apply_mass(self, vectors: np.ndarray) -> np.ndarray:
        """Return M v, (3n, k), of vectors (3n, k)."""
        flat = np.ascontiguousarray(vectors).reshape(len(self.mesh.points), -1)
        return (self.mass @ flat).reshape(vectors.shape)

    def apply_stiffness(self, vectors: np.ndarray) -> np.ndarray:
        """Return T^T K v, (3m, k), of vectors (3n, k) that obey the supports."""
        upper = self.stiffness
        y = self.constraint.to_unknowns(vectors)
        blocks = upper.data[upper.indptr[:-1]]
        own = np.matmul(blocks, y.reshape(-1, 3, y.shape[1])).reshape(y.shape)
        return upper @ y + upper.T @ y - own

    def shifted(self, sigma: float) -> sp.bsr_matrix:
        """Return the upper triangle of T^T (K - sigma M) T, of the pattern of `stiffness`."""
        if sigma == 0.0:
            return self.stiffness
        values = sp.triu(self.mass, format="csr").data
        moved = reduce_blocks(self.pattern, scalar_blocks(values), self.constraint)
        moved.data *= -sigma
        moved.data += self.stiffness.data
        return moved


def build_system(case: Case, mesh: Mesh, pattern: Pattern | None = None) -> System:
    """Return the discrete problem of a case on a mesh of its shape.

    Parameters
    ----------
    case : Case
    mesh : Mesh
        At 20 degrees C; it is scaled to the temperature of the case.
    pattern : Pattern, optional
        Kept from a mesh with the same cells.

    Raises
    ------
    InputError
        If mounts or attached masses point at nothing, or contradict each other.
    """
    rise = case.temperature - REFERENCE_TEMPERATURE
    material = case.material.at(rise)
    longer = 1.0 + (material.expansion or 0.0) * rise
    if longer != 1.0:
        mesh = replace(
            mesh,
            points=mesh.points * longer,
            volume=mesh.volume * longer**3,
            area=mesh.area * longer**2,
        )
    bare = assemble(mesh, material.stiffness(), material.density, pattern)
    body_mass = float(symmetric(bare.pattern, bare.masses).sum())
    added = _attach(case.attached_masses, mesh, bare)
    springs = _add_springs(case.mounts, mesh, bare)
    constraint = _constrain(case.mounts, mesh)
    if constraint.unknowns == 0:
        raise InputError("the mounts hold every node of the part", key="mount")
    mass = bare.mass

    def apply_mass(vectors: np.ndarray) -> np.ndarray:
        return (mass @ vectors.reshape(len(mesh.points), -1)).reshape(vectors.shape)

    return System(
        mesh=mesh,
        pattern=bare.pattern,
        stiffness=reduce_blocks(
            bare.pattern, bare.blocks, constraint, pin=float(bare.blocks[0].max())
        ),
        mass=mass,
        constraint=constraint,
        rigid=rigid_basis(mesh.points, constraint, springs, apply_mass),
        body_mass=body_mass,
        attached_mass=added,
        wave_speed=float(np.sqrt(material.axial_modulus / material.density)),
        material=material,
        beds=tuple(
            (
                _facets(mesh, mount.faces, f"mount.{number}.faces"),
                mount.normal_stiffness,
                mount.tangential_stiffness,
            )
            for number, mount in enumerate(case.mounts, start=1)
            if mount.hold is Hold.SPRINGS
        ),
    )


def _facets(mesh: Mesh, selectors: Sequence[Selector], key: str) -> np.ndarray:
    """Return the facets (k, 6) that selectors point at."""
    try:
        return mesh.facets[select(mesh, selectors)]
    except InputError as error:
        raise error.within(key=key) from None


def _constrain(mounts: Sequence[Mount], mesh: Mesh) -> Constraint:
    held, normals = [], []
    for number, mount in enumerate(mounts, start=1):
        if mount.hold in (Hold.FREE, Hold.SPRINGS):
            continue
        facets = _facets(mesh, mount.faces, f"mount.{number}.faces")
        if mount.hold is Hold.SLIDING:
            normals.append(hold_normals(mesh.points, facets))
            continue
        axes = range(3) if mount.hold is Hold.CLAMPED else ["xyz".index(a) for a in mount.axes]
        held.append(hold_axes(np.unique(facets), axes))
    if normals:
        motions = rigid_motions(mesh.points)
        together = Held(
            nodes=np.concatenate([n.nodes for n in normals]),
            directions=np.concatenate([n.directions for n in normals]),
        )
        held.append(mend_normals(mesh.points, together, motions))
    return make_constraint(len(mesh.points), held)


def _attach(attached: Sequence[AttachedMass], mesh: Mesh, matrices: Matrices) -> float:
    """Add masses to the mass matrix in place; return their sum, kg."""
    for number, item in enumerate(attached, start=1):
        key = f"attached_mass.{number}"
        if item.face is not None:
            facets = _facets(mesh, (item.face,), f"{key}.face")
            entries = spread_mass(mesh.points, facets, item.mass)
        else:
            try:
                facets, entries = patch_mass(mesh, item)
            except InputError as error:
                raise error.within(key=key) from None
        facet, a, b, first, second = facet_entries(facets)
        at = matrices.pattern.positions(first, second)
        np.add.at(matrices.masses, at, entries[facet, a, b])
    return float(sum(item.mass for item in attached))


def _add_springs(mounts: Sequence[Mount], mesh: Mesh, matrices: Matrices) -> np.ndarray:
    """Add spring beds to the stiffness in place; return their energy (6, 6) in rigid motions."""
    energy = np.zeros((6, 6))
    for number, mount in enumerate(mounts, start=1):
        if mount.hold is not Hold.SPRINGS:
            continue
        facets = _facets(mesh, mount.faces, f"mount.{number}.faces")
        beds = spring_bed(mesh.points, facets, mount.normal_stiffness, mount.tangential_stiffness)
        facet, a, b, first, second = facet_entries(facets)
        at = matrices.pattern.positions(first, second)
        for i in range(3):
            for j in range(3):
                np.add.at(matrices.blocks[3 * i + j], at, beds[facet, a, b, i, j])
        motions = rigid_motions(mesh.points).reshape(-1, 3, 6)[facets]
        energy += np.einsum("faim,fabij,fbjn->mn", motions, beds, motions, optimize=True)
    return energy
