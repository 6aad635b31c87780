"""Public names of a package, loaded from their modules when first asked for.

So ``modewright --help`` and ``import modewright.fem`` load no numerics.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from importlib import import_module
from typing import Any


def lazily(package: str, homes: Mapping[str, tuple[str, ...]]) -> Callable[[str], Any]:
    """Return a module ``__getattr__`` that finds public names in their modules.

    Parameters
    ----------
    package : str
        ``__name__`` of the package.
    homes : mapping
        Relative module -> names it holds.
    """
    home_of = {name: home for home, names in homes.items() for name in names}

    def find(name: str) -> Any:
        try:
            home = home_of[name]
        except KeyError:
            raise AttributeError(f"module {package!r} has no attribute {name!r}") from None
        return getattr(import_module(home, package), name)

    return find
