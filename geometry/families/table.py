"""All shape families, by the name that the case file uses."""

from __future__ import annotations

from ..shape import Family
from . import (
    arched_bar,
    bar,
    comb,
    fork,
    mesh,
    outline,
    plate,
    revolved,
    ring,
    solid,
    stepped_bar,
    tube,
    tuning_fork,
)

FAMILIES: dict[str, Family] = {
    "bar": bar.FAMILY,
    "stepped_bar": stepped_bar.FAMILY,
    "arched_bar": arched_bar.FAMILY,
    "fork": fork.FAMILY,
    "tuning_fork": tuning_fork.FAMILY,
    "plate": plate.FAMILY,
    "ring": ring.FAMILY,
    "revolved": revolved.FAMILY,
    "tube": tube.FAMILY,
    "comb": comb.FAMILY,
    "outline": outline.FAMILY,
    "solid": solid.FAMILY,
    "mesh": mesh.FAMILY,
}
