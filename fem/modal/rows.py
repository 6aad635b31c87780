"""The rows of a result: pitches, ratios, targets and measured pitches of named modes."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from ...geometry.errors import InputError
from .case import Case
from .modes import Mode
from .naming.find import find_mode
from .naming.label import Identity
from .naming.pairs import CENTS
from .pitch import cents, nearest_note
from .theory.bars import Prediction


def mode_rows(
    case: Case,
    frequencies: np.ndarray,
    raw: np.ndarray,
    identity: Identity,
    theory: Sequence[Prediction | None],
    residuals: np.ndarray,
) -> tuple[Mode, ...]:
    """Return one row for each mode.

    Parameters
    ----------
    case : Case
    frequencies : (m,) Hz, ascending, less the mesh error
    raw : (m,) Hz, of the mesh
    identity : names and shapes of the m modes
    theory : of each mode
    residuals : (m,)

    Raises
    ------
    InputError
        If a target, a measured row or the reference mode fits no mode, or several.
    """
    best = [float(f) for f in frequencies]
    names = identity.names
    reference = _reference(case, best, names)
    targets = _targets(case, best, names)
    measured = _measured(case, names)
    rows = []
    for i, (label, hz) in enumerate(zip(identity.labels, best, strict=True)):
        note, off = nearest_note(hz, case.pitch.a4)
        nearest = _nearest(i, best)
        predicted = theory[i]
        rows.append(
            Mode(
                index=i + 1,
                name=label.name,
                mixed=label.mixed,
                pair=label.pair,
                frequency_hz=hz,
                raw_hz=float(raw[i]),
                mesh_error_cents=cents(float(raw[i]), hz),
                note=note,
                cents_from_note=off,
                ratio=hz / reference,
                shares=label.shares,
                prong_balance=label.prong_balance,
                root_share=label.root_share,
                tine_shares=label.tine_shares,
                nodal_points_mm=label.nodal_points_mm,
                modal_mass_g=_modal_mass(identity.shapes[i]) * 1e3,
                quality_factor=None,
                t60_s=None,
                decay_basis=None,
                theory_hz=None if predicted is None else predicted[0],
                theory=None if predicted is None else predicted[1],
                target_hz=targets.get(i),
                cents_to_target=_off(hz, targets.get(i)),
                measured_hz=measured.get(i),
                cents_to_measured=_off(hz, measured.get(i)),
                nearest_index=None if nearest is None else nearest + 1,
                nearest_gap_cents=None if nearest is None else cents(best[nearest], hz),
                residual=float(residuals[i]),
            )
        )
    return tuple(rows)


def _modal_mass(shape: np.ndarray) -> float:
    """Return the modal mass, kg, of a mass-normalised shape (n, 3) scaled to 1 at its largest.

    u^T M u = 1, so scaled by 1/max|u| it is 1/max|u|^2.
    """
    return float(1.0 / np.max(np.einsum("ni,ni->n", shape, shape)))


def _reference(case: Case, best: Sequence[float], names: Sequence[str]) -> float:
    if case.pitch.reference_mode is None:
        return best[0] if best else 1.0
    return best[_place(case.pitch.reference_mode, names, "pitch.reference_mode")]


def _targets(case: Case, best: Sequence[float], names: Sequence[str]) -> dict[int, float]:
    wanted: dict[int, float] = {}
    for number, target in enumerate(case.targets, 1):
        key = f"target.{number}"
        place = _place(target.mode, names, f"{key}.mode")
        if target.frequency is not None:
            hz = target.frequency
        elif target.ratio is not None and target.of is not None:
            hz = target.ratio * best[_place(target.of, names, f"{key}.of")]
        else:
            raise InputError("has neither a frequency nor a ratio", key=key)
        _once(wanted, place, names, f"{key}.mode", target.mode)
        wanted[place] = hz
    return wanted


def _measured(case: Case, names: Sequence[str]) -> dict[int, float]:
    found: dict[int, float] = {}
    for number, row in enumerate(case.measured, 1):
        key = f"measured.{number}.mode"
        place = _place(row.mode, names, key)
        _once(found, place, names, key, row.mode)
        found[place] = row.frequency
    return found


def _place(name: str, names: Sequence[str], key: str) -> int:
    try:
        return find_mode(name, names)
    except InputError as error:
        raise error.within(key=key) from None


def _once(taken: dict[int, float], place: int, names: Sequence[str], key: str, name: str) -> None:
    if place in taken:
        raise InputError(f"is {names[place]!r}, which stands there already", key=key, value=name)


def _off(hz: float, wanted: float | None) -> float | None:
    return None if wanted is None else cents(hz, wanted)


def _nearest(i: int, best: Sequence[float]) -> int | None:
    """Return the position of the mode nearest in cents, its own pair left out; None if alone."""
    gaps = {j: abs(cents(other, best[i])) for j, other in enumerate(best) if j != i}
    return min((j for j in gaps if gaps[j] > CENTS), key=gaps.__getitem__, default=None)
