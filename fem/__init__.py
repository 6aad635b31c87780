"""What the body does: materials, mounts, the eigen-solve, names and theory.

>>> from modewright.cases import read_case
>>> from modewright.fem import solve
>>> modes = solve(read_case("tine.toml"))  # doctest: +SKIP
>>> print(modes)  # doctest: +SKIP
>>> modes.frequencies, modes.names, modes.shapes  # doctest: +SKIP
"""

from typing import TYPE_CHECKING

from ..geometry.lazy import lazily

if TYPE_CHECKING:
    from .modal.case import Case as Case
    from .modal.case import Expected as Expected
    from .modal.case import Measured as Measured
    from .modal.case import Pitch as Pitch
    from .modal.case import SolveSettings as SolveSettings
    from .modal.case import Target as Target
    from .modal.material import Material as Material
    from .modal.materials import find_material as find_material
    from .modal.modes import Mode as Mode
    from .modal.modes import Modes as Modes
    from .modal.mount import AttachedMass as AttachedMass
    from .modal.mount import Hold as Hold
    from .modal.mount import Mount as Mount
    from .modal.solve import solve as solve
    from .study.follow import follow as follow
    from .study.sweep import Sweep as Sweep
    from .study.sweep import Track as Track
    from .study.sweep import sweep as sweep

__all__ = [
    "AttachedMass",
    "Case",
    "Expected",
    "Hold",
    "Material",
    "Measured",
    "Mode",
    "Modes",
    "Mount",
    "Pitch",
    "SolveSettings",
    "Sweep",
    "Target",
    "Track",
    "find_material",
    "follow",
    "solve",
    "sweep",
]

__getattr__ = lazily(
    __name__,
    {
        ".modal.case": ("Case", "Expected", "Measured", "Pitch", "SolveSettings", "Target"),
        ".modal.material": ("Material",),
        ".modal.materials": ("find_material",),
        ".modal.modes": ("Mode", "Modes"),
        ".modal.mount": ("AttachedMass", "Hold", "Mount"),
        ".modal.solve": ("solve",),
        ".study.follow": ("follow",),
        ".study.sweep": ("Sweep", "Track", "sweep"),
    },
)


def __dir__() -> list[str]:
    return __all__
