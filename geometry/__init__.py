"""What the body is: shape families, imported bodies, named faces, meshes."""

from typing import TYPE_CHECKING

from .lazy import lazily

if TYPE_CHECKING:
    from .anatomy import Anatomy as Anatomy
    from .anatomy import Kind as Kind
    from .errors import InputError as InputError
    from .errors import MeshError as MeshError
    from .errors import ModewrightError as ModewrightError
    from .errors import SolveError as SolveError
    from .errors import ToolError as ToolError
    from .errors import WorkError as WorkError
    from .exchange import write_mesh as write_mesh
    from .families.table import FAMILIES as FAMILIES
    from .mesh import Mesh as Mesh
    from .mesher import generate as generate
    from .shape import Family as Family
    from .shape import Shape as Shape
    from .shape import make_shape as make_shape

__all__ = [
    "FAMILIES",
    "Anatomy",
    "Family",
    "InputError",
    "Kind",
    "Mesh",
    "MeshError",
    "ModewrightError",
    "Shape",
    "SolveError",
    "ToolError",
    "WorkError",
    "generate",
    "make_shape",
    "write_mesh",
]

__getattr__ = lazily(
    __name__,
    {
        ".anatomy": ("Anatomy", "Kind"),
        ".errors": (
            "InputError",
            "MeshError",
            "ModewrightError",
            "SolveError",
            "ToolError",
            "WorkError",
        ),
        ".exchange": ("write_mesh",),
        ".families.table": ("FAMILIES",),
        ".mesh": ("Mesh",),
        ".mesher": ("generate",),
        ".shape": ("Family", "Shape", "make_shape"),
    },
)


def __dir__() -> list[str]:
    return __all__
