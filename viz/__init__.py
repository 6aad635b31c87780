"""What leaves the program: tables, pictures, animations and exchange files."""

from typing import TYPE_CHECKING

from ..geometry.lazy import lazily

if TYPE_CHECKING:
    from .chart import sweep_chart as sweep_chart
    from .document import modes_document as modes_document
    from .results import Written as Written
    from .results import write_results as write_results
    from .table import Table as Table
    from .table import modes_csv as modes_csv
    from .table import modes_table as modes_table

__all__ = [
    "Table",
    "Written",
    "modes_csv",
    "modes_document",
    "modes_table",
    "sweep_chart",
    "write_results",
]

__getattr__ = lazily(
    __name__,
    {
        ".chart": ("sweep_chart",),
        ".document": ("modes_document",),
        ".results": ("Written", "write_results"),
        ".table": ("Table", "modes_csv", "modes_table"),
    },
)


def __dir__() -> list[str]:
    return __all__
