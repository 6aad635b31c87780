"""What the pictures of a result are drawn from, as arrays that a child process reads."""

from __future__ import annotations

import json
from dataclasses import asdict, dataclass
from pathlib import Path

import numpy as np
import scipy.sparse as sparse

from ..fem.modal.modes import Mode, Modes
from .surface import Surface, outer_surface
from .table import cents, hertz
from .view import View, choose_view, exaggeration, scale_bar_length

#: Facets are split finer while the triangles stay below this number.
_TRIANGLES = 30_000

_MINUS = "\u2212"


@dataclass(frozen=True, kw_only=True, slots=True)
class Caption:
    """What stands over one mode's picture."""

    number: int
    name: str
    pitch: str
    detail: str


@dataclass(frozen=True, eq=False, kw_only=True, slots=True)
class Gallery:
    """Everything the pictures show.

    Attributes
    ----------
    title, subtitle : str
    surface : Surface
    view : View
    motions : (m, p, 3) float, m
        Displacements at the points of the surface, exaggerated as drawn.
    captions : (m,) Caption
    """

    title: str
    subtitle: str
    surface: Surface
    view: View
    motions: np.ndarray
    captions: tuple[Caption, ...]

    def scale_bar(self, pixels_per_metre: float, longest: float) -> tuple[float, str]:
        """Return length in pixels and text of a scale bar of at most `longest` pixels."""
        metre = float(np.linalg.norm(self.view.flat(self.view.along))) * pixels_per_metre
        length = scale_bar_length(1e3 * longest / metre)
        return length * 1e-3 * metre, f"{length:g} mm"


def make_gallery(modes: Modes) -> Gallery:
    """Return what to draw of a result."""
    facets = len(modes.mesh.facets)
    levels = max(1, min(3, int(np.log(_TRIANGLES / facets) / np.log(4))))
    surface = outer_surface(modes.mesh, levels=levels)
    motions = []
    for shape in modes.shapes:
        motion = surface.values(shape)
        motions.append(motion * exaggeration(surface.points, surface.triangles, motion))
    return Gallery(
        title=modes.case.title,
        subtitle=_subtitle(modes, surface),
        surface=surface,
        view=choose_view(modes.anatomy, surface.points, motions),
        motions=np.array(motions),
        captions=tuple(map(_caption, modes.modes)),
    )


def save_gallery(path: Path, gallery: Gallery) -> None:
    """Write a gallery as one .npz file."""
    surface, view = gallery.surface, gallery.view
    texts = {
        "title": gallery.title,
        "subtitle": gallery.subtitle,
        "captions": [asdict(caption) for caption in gallery.captions],
    }
    np.savez(
        path,
        texts=np.array(json.dumps(texts)),
        motions=gallery.motions.astype(np.float32),
        points=surface.points,
        triangles=surface.triangles,
        edges=surface.edges,
        edge_triangles=surface.edge_triangles,
        patches=surface.patches,
        view=np.array([view.right, view.up, view.eye, view.along]),
        window=np.array([view.low, view.high]),
    )


def load_gallery(path: Path) -> Gallery:
    """Read a gallery that `save_gallery` wrote; its surface has no weights left."""
    with np.load(path) as data:
        texts = json.loads(str(data["texts"]))
        points = data["points"]
        right, up, eye, along = data["view"]
        low, high = data["window"]
        return Gallery(
            title=texts["title"],
            subtitle=texts["subtitle"],
            captions=tuple(Caption(**caption) for caption in texts["captions"]),
            motions=data["motions"].astype(float),
            view=View(right=right, up=up, eye=eye, along=along, low=low, high=high),
            surface=Surface(
                points=points,
                triangles=data["triangles"],
                edges=data["edges"],
                edge_triangles=data["edge_triangles"],
                patches=data["patches"],
                weights=sparse.csr_array((len(points), 0)),
            ),
        )


def _subtitle(modes: Modes, surface: Surface) -> str:
    holds = {mount.hold.value for mount in modes.case.mounts} or {"free"}
    box = " \u00d7 ".join(f"{side * 1e3:.4g}" for side in np.ptp(surface.points, axis=0))
    return "   ·   ".join(
        [
            modes.case.material.name,
            " and ".join(sorted(holds)),
            f"{box} mm",
            f"{modes.mesh_facts.mass_g:.4g} g",
        ]
    )


def _caption(mode: Mode) -> Caption:
    detail = f"{mode.note} {cents(mode.cents_from_note)} cents"
    if mode.cents_to_target is not None:
        detail += f",  {cents(mode.cents_to_target)} to target"
    if mode.pair:
        detail += ",  pair"
    if mode.mixed:
        detail += ",  mixed"
    return Caption(
        number=mode.index,
        name=mode.name,
        pitch=f"{hertz(mode.frequency_hz)} Hz",
        detail=detail.replace("-", _MINUS),
    )
