"""Integrals over the surface: attached mass and beds of springs."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from .element import facet_gradients, facet_quadrature, facet_values

#: Degree of exactness of the surface rule: products of two shape functions are
#: of degree 4 on flat facets; curved facets and their normals need more.
DEGREE = 8


@dataclass(frozen=True, eq=False, kw_only=True, slots=True)
class FacetGeometry:
    """Facets at quadrature points.

    Attributes
    ----------
    values : (q, 6) float
        Shape functions.
    points : (f, q, 3) float, m
    normals : (f, q, 3) float
        Unit, out of the body.
    areas : (f, q) float, m2
        Area that each point stands for.
    """

    values: np.ndarray
    points: np.ndarray
    normals: np.ndarray
    areas: np.ndarray


def facet_geometry(
    nodes: np.ndarray, reference: np.ndarray | None = None, weights: np.ndarray | None = None
) -> FacetGeometry:
    """Return facets (f, 6, 3) at points (q, 2) of the unit triangle with weights (q,).

    Default points are a rule exact to `DEGREE`.
    """
    if reference is None or weights is None:
        reference, weights = facet_quadrature(DEGREE)
    values = facet_values(reference)
    slopes = facet_gradients(reference)
    along = np.einsum("qa,fai->fqi", slopes[..., 0], nodes)
    across = np.einsum("qa,fai->fqi", slopes[..., 1], nodes)
    normals = np.cross(along, across)
    lengths = np.linalg.norm(normals, axis=-1)
    return FacetGeometry(
        values=values,
        points=np.einsum("qa,fai->fqi", values, nodes),
        normals=normals / lengths[..., None],
        areas=lengths * weights,
    )


def facet_areas(points: np.ndarray, facets: np.ndarray) -> np.ndarray:
    """Return the areas (f,) of facets (f, 6), m2."""
    return facet_geometry(points[facets]).areas.sum(axis=1)


def spread_mass(points: np.ndarray, facets: np.ndarray, mass: float) -> np.ndarray:
    """Return mass matrices (f, 6, 6), kg, of a mass spread evenly over facets (f, 6)."""
    geometry = facet_geometry(points[facets])
    matrices = _products(geometry.values, geometry.areas)
    return matrices * (mass / geometry.areas.sum())


def spring_bed(
    points: np.ndarray, facets: np.ndarray, normal: float, tangential: float
) -> np.ndarray:
    """Return stiffness (f, 6, 6, 3, 3), N/m, of a bed of springs on facets (f, 6).

    Parameters
    ----------
    normal, tangential : float, N/m3
        Stiffness per area against motion along and across the facet's normal n:
        kn n n^T + kt (I - n n^T).
    """
    geometry = facet_geometry(points[facets])
    outer = geometry.normals[..., :, None] * geometry.normals[..., None, :]
    bed = (normal - tangential) * outer + tangential * np.eye(3)
    pairs = geometry.values[:, :, None] * geometry.values[:, None, :]
    return np.einsum("fq,fqij,qab->fabij", geometry.areas, bed, pairs, optimize=True)


def _products(values: np.ndarray, areas: np.ndarray) -> np.ndarray:
    pairs = (values[:, :, None] * values[:, None, :]).reshape(len(values), 36)
    return (areas @ pairs).reshape(-1, 6, 6)


def facet_entries(
    facets: np.ndarray,
) -> tuple[np.ndarray, np.ndarray, np.ndarray, np.ndarray, np.ndarray]:
    """Return the entries of facet matrices that lie in the upper triangle.

    Returns
    -------
    facet, a, b : (e,) int
        Entry (a, b) of the matrix of `facet`, where node a <= node b.
    first, second : (e,) int
        Those nodes.
    """
    facet, a, b = np.nonzero(facets[:, :, None] <= facets[:, None, :])
    return facet, a, b, facets[facet, a], facets[facet, b]
