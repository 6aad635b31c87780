"""A moving body rendered to pixels (the home of pyvista)."""

from __future__ import annotations

from typing import Any

import numpy as np
import pyvista as pv

from ..geometry.errors import ToolError
from .contour import Segments, nodal_lines, zero_lines
from .palette import ACCENT, INK, REST, WHITE, motion_colours, rgb
from .surface import Surface, point_normals, triangle_normals
from .view import View

#: Lines lie this share of the picture's height before the surface, so that they
#: are not cut by it; in a parallel view they do not shift on the picture.
_LIFT = 0.006

#: Lamps as seen from the eye (right, up, towards it), and their strengths. Most light
#: comes from everywhere: lightness tells how far a point moves, shade only its slope.
_LIGHTS = (((0.2, 0.9, 0.9), 0.75), ((-0.7, -0.2, 0.9), 0.45))
_AMBIENT = 0.62


class Scene:
    """One body in one view; modes and phases are set in place, never rebuilt.

    Parameters
    ----------
    surface : Surface
    view : View
    width, height : int
        Size of the pictures, pixels.
    line : float
        Width of the thinnest line, pixels.

    Attributes
    ----------
    pixels_per_metre : float
    """

    def __init__(self, surface: Surface, view: View, *, width: int, height: int, line: float):
        self._surface, self._view, self._line = surface, view, line
        room = np.array([width, height]) / view.size
        self.pixels_per_metre = float(room.min())
        self._span = height / self.pixels_per_metre
        self._motion = np.zeros_like(surface.points)
        self._nodal = zero_lines(surface.triangles, np.ones(len(surface.points)))

        self._plotter = pv.Plotter(off_screen=True, window_size=[width, height], lighting="none")
        self._plotter.background_color = pv.Color(WHITE)
        # In software, samples for each pixel cost more than a larger picture made small.
        self._plotter.disable_anti_aliasing()
        window = self._plotter.render_window
        if window is not None:
            window.SetMultiSamples(0)
        for place, strength in _LIGHTS:
            light = pv.Light(position=place, light_type="camera light", intensity=strength)
            self._plotter.add_light(light)
        self._set_camera()

        self._body = pv.PolyData.from_regular_faces(surface.points.copy(), surface.triangles)
        self._body.point_data["motion"] = np.zeros(len(surface.points))
        self._body.point_data.active_normals = point_normals(surface.points, surface.triangles)
        colours = np.column_stack([motion_colours(), np.full(256, 255)])
        actor = self._plotter.add_mesh(
            self._body,
            scalars="motion",
            cmap=pv.LookupTable(values=colours.astype(np.uint8), scalar_range=(0.0, 1.0)),
            clim=(0.0, 1.0),
            show_scalar_bar=False,
            ambient=_AMBIENT,
            diffuse=1.0 - _AMBIENT,
            specular=0.0,
            reset_camera=False,
        )
        actor.prop.interpolation = "Phong"
        # What may lie over what: nodal lines over outlines over the rest outline.
        self._rest = self._add_lines(REST)
        self._outline = self._add_lines(INK)
        self._nodes = self._add_lines(ACCENT)
        self._set_lines(self._rest, self._outline_of(surface.points, lift=-0.5), line)

    def set_mode(self, motion: np.ndarray) -> None:
        """Show a motion (p, 3), m as drawn, at the points of the surface."""
        self._motion = motion
        size = np.linalg.norm(motion, axis=1)
        share = size / max(size.max(), np.finfo(float).tiny)
        self._write(self._body.GetPointData().GetScalars(), share)
        self._nodal = nodal_lines(self._surface, motion)

    def picture(self, phase: float) -> np.ndarray:
        """Return the picture (h, w, 3) uint8 of the body moved by `phase` times the motion."""
        points = self._surface.points + phase * self._motion
        normals = point_normals(points, self._surface.triangles)
        self._write(self._body.GetPoints().GetData(), points)
        self._body.GetPoints().Modified()
        self._write(self._body.GetPointData().GetNormals(), normals)
        self._set_lines(self._outline, self._outline_of(points, lift=1.0), self._line)
        self._set_lines(self._nodes, self._front_nodal_lines(points), 2.6 * self._line)
        self._plotter.render()
        return np.asarray(self._plotter.screenshot(return_img=True))[..., :3]

    def close(self) -> None:
        """Free the window."""
        self._plotter.close()

    def __enter__(self) -> Scene:
        return self

    def __exit__(self, *_: object) -> None:
        self.close()

    @staticmethod
    def _write(target: Any, values: np.ndarray) -> None:
        """Overwrite a VTK array in place."""
        pv.convert_array(target)[:] = values
        target.Modified()

    def _set_camera(self) -> None:
        view, camera = self._view, self._plotter.camera
        middle = (
            view.right * (view.low + view.high)[0] / 2 + view.up * (view.low + view.high)[1] / 2
        )
        depth = self._surface.points @ view.eye
        middle = middle + view.eye * (depth.min() + depth.max()) / 2
        away = np.ptp(depth) + 2 * self._span
        camera.focal_point = middle
        camera.position = middle + view.eye * away
        camera.up = view.up
        camera.enable_parallel_projection()
        camera.parallel_scale = self._span / 2
        camera.clipping_range = (0.01 * away, 2 * away)

    def _add_lines(self, colour: str) -> pv.Actor:
        return self._plotter.add_mesh(
            pv.Plane(), color=colour, lighting=False, reset_camera=False, show_edges=False
        )

    def _set_lines(self, actor: pv.Actor, ends: np.ndarray, width: float) -> None:
        """Show line pieces with ends (2 k, 3), `width` pixels wide; nothing where k is 0.

        Each piece is a strip that faces the eye and reaches a little over both its
        ends: the renderer's own wide lines leave gaps between short pieces.
        """
        actor.SetVisibility(len(ends) > 0)
        if len(ends) == 0:
            return
        eye, half = self._view.eye, width / 2 / self.pixels_per_metre
        first, last = ends[0::2], ends[1::2]
        along = last - first
        along = along - np.outer(along @ eye, eye)
        length = np.linalg.norm(along, axis=1, keepdims=True)
        tiny = length[:, 0] < 1e-9 * self._span
        along = np.where(tiny[:, None], self._view.right, along / np.where(length > 0, length, 1))
        over, side = 0.6 * half * along, half * np.cross(eye, along)
        corners = np.stack(
            [first - over - side, last + over - side, last + over + side, first - over + side],
            axis=1,
        )
        faces = np.arange(corners.shape[0] * 4).reshape(-1, 4)
        actor.mapper.SetInputData(pv.PolyData.from_regular_faces(corners.reshape(-1, 3), faces))

    def _outline_of(self, points: np.ndarray, *, lift: float) -> np.ndarray:
        """Return the ends (2 k, 3) of the sharp edges and silhouettes the eye sees."""
        surface, eye = self._surface, self._view.eye
        facing = triangle_normals(points, surface.triangles) @ eye > 0
        seen = facing[surface.edge_triangles].any(axis=1)
        edges = points[surface.edges[seen].ravel()]
        turn = zero_lines(surface.triangles, point_normals(points, surface.triangles) @ eye)
        ends = np.vstack([edges, turn.places(points)])
        return ends + lift * _LIFT * self._span * eye

    def _front_nodal_lines(self, points: np.ndarray) -> np.ndarray:
        lines: Segments = self._nodal
        normals = triangle_normals(points, self._surface.triangles[lines.triangles])
        seen = lines.only(normals @ self._view.eye > 0)
        return seen.places(points) + 1.5 * _LIFT * self._span * self._view.eye


def check_rendering() -> None:
    """Render one small picture and check its colours; kills the process where OpenGL is missing.

    Raises
    ------
    ToolError
        If the picture is not what was drawn.
    """
    plotter = pv.Plotter(off_screen=True, window_size=[32, 32], lighting="none")
    plotter.background_color = pv.Color(WHITE)
    plotter.add_mesh(pv.Plane(), color=ACCENT, lighting=False)
    plotter.camera_position = "xy"
    pixels = np.asarray(plotter.screenshot(return_img=True))[..., :3].astype(int)
    plotter.close()
    if np.abs(pixels[16, 16] - rgb(ACCENT)).max() > 3:
        raise ToolError(f"the test picture has the colour {pixels[16, 16].tolist()}")
