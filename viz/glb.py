"""A moving body as one binary glTF file: a clip for each mode.

Format: glTF 2.0 (ISO/IEC 12113:2022) with the extension KHR_mesh_quantization.
"""

from __future__ import annotations

import json
import struct
from pathlib import Path
from typing import Any

import numpy as np

from ..fem.modal.modes import Mode, Modes
from .palette import STEEL, rgb
from .surface import Surface, outer_surface, point_normals
from .table import hertz
from .view import exaggeration

#: Length of every clip, s, and its keys; the first and the last are the body at rest.
PERIOD = 1.5
KEYS = 25

_SHORT = 32767
_BYTE = 127
_ARRAY_BUFFER, _ELEMENT_ARRAY_BUFFER = 34962, 34963
_COMPONENTS = {"i1": 5120, "i2": 5122, "u2": 5123, "u4": 5125, "f4": 5126}
_TYPES = {1: "SCALAR", 3: "VEC3"}

#: A quarter turn about x: the body's z points up, as y does in glTF.
_Z_UP = [-(0.5**0.5), 0.0, 0.0, 0.5**0.5]


def write_modes_glb(path: Path, modes: Modes) -> None:
    """Write the outer surface with one morph target and one clip for each mode.

    Positions and motions are 16-bit integers, scaled to metres by the node;
    motions are exaggerated as in the pictures. Clips are called after the modes.
    """
    surface = outer_surface(modes.mesh)
    motions = []
    for shape in modes.shapes:
        motion = surface.values(shape)
        motions.append(motion * exaggeration(surface.points, surface.triangles, motion))
    names = [clip_name(mode) for mode in modes.modes]
    path.write_bytes(_glb(surface, np.array(motions), names, modes.case.title))


def clip_name(mode: Mode) -> str:
    """Return what a mode's clip is called, such as ``torsion 1, 1704.4 Hz``."""
    return f"{mode.name}, {hertz(mode.frequency_hz)} Hz"


class _Blocks:
    """The binary part of the file, filled array by array."""

    def __init__(self) -> None:
        self.data = bytearray()
        self.views: list[dict[str, Any]] = []
        self.accessors: list[dict[str, Any]] = []

    def add(
        self,
        array: np.ndarray,
        *,
        target: int | None = None,
        normalized: bool = False,
        bounds: bool = False,
    ) -> int:
        """Append an array (n,) or (n, 3) and return the number of its accessor.

        Rows of vertex data start at multiples of four bytes, as glTF asks.
        """
        rows = np.atleast_2d(array.T).T
        width = rows.shape[1]
        view: dict[str, Any] = {"buffer": 0, "byteOffset": len(self.data)}
        accessor: dict[str, Any] = {
            "bufferView": len(self.views),
            "componentType": _COMPONENTS[rows.dtype.str[1:]],
            "count": len(rows),
            "type": _TYPES[width],
        }
        if normalized:
            accessor["normalized"] = True
        if bounds:
            accessor["min"] = rows.min(axis=0).tolist()
            accessor["max"] = rows.max(axis=0).tolist()
        if target == _ARRAY_BUFFER:
            stride = -(-width * rows.itemsize // 4) * 4
            padded = np.zeros((len(rows), stride // rows.itemsize), rows.dtype)
            padded[:, :width] = rows
            rows = padded
            view["byteStride"] = stride
        content = np.ascontiguousarray(rows).tobytes()
        view["byteLength"] = len(content)
        if target:
            view["target"] = target
        self.data += content + bytes(-len(content) % 4)
        self.views.append(view)
        self.accessors.append(accessor)
        return len(self.accessors) - 1


def _glb(surface: Surface, motions: np.ndarray, names: list[str], title: str) -> bytes:
    points, triangles = surface.points, surface.triangles
    low, high = points.min(axis=0), points.max(axis=0)
    centre = (low + high) / 2
    step = max((high - low).max() / 2, np.abs(motions).max(initial=0.0)) / _SHORT
    blocks = _Blocks()

    def position(vectors: np.ndarray) -> int:
        whole = np.rint(vectors / step).astype("<i2")
        return blocks.add(whole, target=_ARRAY_BUFFER, bounds=True)

    attributes = {
        "POSITION": position(points - centre),
        "NORMAL": blocks.add(
            np.rint(point_normals(points, triangles) * _SHORT).astype("<i2"),
            target=_ARRAY_BUFFER,
            normalized=True,
        ),
    }
    targets = []
    for motion in motions:
        # Half the way from one end of the swing to the other.
        turn = point_normals(points + motion, triangles) - point_normals(points - motion, triangles)
        turn = np.clip(np.rint(turn / 2 * _BYTE), -_BYTE, _BYTE).astype("i1")
        targets.append(
            {
                "POSITION": position(motion),
                "NORMAL": blocks.add(turn, target=_ARRAY_BUFFER, normalized=True),
            }
        )
    index_type = "<u2" if len(points) < 65535 else "<u4"
    primitive = {
        "attributes": attributes,
        "indices": blocks.add(triangles.ravel().astype(index_type), target=_ELEMENT_ARRAY_BUFFER),
        "material": 0,
        "targets": targets,
    }
    times = np.linspace(0.0, PERIOD, KEYS)
    clock = blocks.add(times.astype("<f4"), bounds=True)
    swing = np.sin(2 * np.pi * times / PERIOD)
    swing[[0, -1]] = 0.0
    clips = []
    for k, name in enumerate(names):
        weights = np.zeros((KEYS, len(names)), "<f4")
        weights[:, k] = swing
        output = blocks.add(weights.ravel())
        clips.append(
            {
                "name": name,
                "samplers": [{"input": clock, "output": output, "interpolation": "LINEAR"}],
                "channels": [{"sampler": 0, "target": {"node": 0, "path": "weights"}}],
            }
        )
    turned = [centre[0], centre[2], -centre[1]]
    document = {
        "asset": {"version": "2.0", "generator": "modewright"},
        "extensionsUsed": ["KHR_mesh_quantization"],
        "extensionsRequired": ["KHR_mesh_quantization"],
        "scene": 0,
        "scenes": [{"name": title, "nodes": [0]}],
        "nodes": [
            {
                "name": title,
                "mesh": 0,
                "rotation": _Z_UP,
                "scale": [float(step)] * 3,
                "translation": [float(v) for v in turned],
            }
        ],
        "meshes": [
            {
                "name": title,
                "primitives": [primitive],
                "weights": [0.0] * len(names),
                "extras": {"targetNames": names},
            }
        ],
        "materials": [
            {
                "name": "metal",
                "doubleSided": True,
                "pbrMetallicRoughness": {
                    "baseColorFactor": [*_linear(STEEL), 1.0],
                    "metallicFactor": 0.1,
                    "roughnessFactor": 0.55,
                },
            }
        ],
        "animations": clips,
        "accessors": blocks.accessors,
        "bufferViews": blocks.views,
        "buffers": [{"byteLength": len(blocks.data)}],
    }
    return _container(document, bytes(blocks.data))


def _container(document: dict[str, Any], binary: bytes) -> bytes:
    """Return the file: a header, the JSON chunk and the binary chunk."""
    text = json.dumps(document, separators=(",", ":"), ensure_ascii=False, allow_nan=False)
    chunk = text.encode()
    chunk += b" " * (-len(chunk) % 4)
    length = 12 + 8 + len(chunk) + 8 + len(binary)
    return b"".join(
        [
            struct.pack("<4sII", b"glTF", 2, length),
            struct.pack("<I4s", len(chunk), b"JSON"),
            chunk,
            struct.pack("<I4s", len(binary), b"BIN\0"),
            binary,
        ]
    )


def _linear(colour: str) -> list[float]:
    """Return linear red, green and blue, 0 to 1, of an sRGB colour (IEC 61966-2-1)."""
    share = np.array(rgb(colour)) / 255
    return np.where(share <= 0.04045, share / 12.92, ((share + 0.055) / 1.055) ** 2.4).tolist()
