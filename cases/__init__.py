"""What is asked: case files, commands and examples."""

from typing import TYPE_CHECKING

from ..geometry.lazy import lazily

if TYPE_CHECKING:
    from .expect import Comparison as Comparison
    from .expect import compare as compare
    from .reader import build_case as build_case
    from .reader import case_document as case_document
    from .reader import read_case as read_case

__all__ = ["Comparison", "build_case", "case_document", "compare", "read_case"]

__getattr__ = lazily(
    __name__,
    {
        ".expect": ("Comparison", "compare"),
        ".reader": ("build_case", "case_document", "read_case"),
    },
)


def __dir__() -> list[str]:
    return __all__
