"""From a case file to a frozen `Case`."""

from __future__ import annotations

from collections.abc import Mapping
from pathlib import Path
from typing import Any

from ..fem.modal.case import Case, Expected, Measured, Pitch, SolveSettings, Target
from ..fem.modal.mount import AttachedMass, Hold, Mount
from ..fem.modal.pitch import note_frequency
from ..geometry.errors import InputError
from .body import read_shape, shape_table
from .places import Places
from .schema import AttachedMassTable, CaseTables, MountTable, TargetTable, plain, read_tables
from .sense import A4_HZ, ACCURACY_CENTS, CENTS, TEMPERATURE_C
from .source import read_toml
from .substance import material_table, read_material

#: Elastic modes solved for when the case asks for no number and no highest frequency.
DEFAULT_MODES = 12

#: Softest bed of springs, N/mm3: below, the lowest modes lose digits to rounding (0.1 %
#: at a tenth of this).
SOFTEST = 0.01


def read_case(path: str | Path) -> Case:
    """Return the case of a TOML file.

    Relative file names in the case are looked for beside the case file.

    Parameters
    ----------
    path : str or Path

    Raises
    ------
    InputError
        For any mistake in the file, in one sentence with the file, the key
        path, the value and what is allowed.
    """
    path = Path(path)
    return build_case(read_toml(path), file=path)


def build_case(
    document: Mapping[str, Any], *, file: Path | None = None, folder: Path | None = None
) -> Case:
    """Return the case of a document with the tables of a case file.

    Parameters
    ----------
    document : mapping
        As `tomllib` would read it.
    file : Path, optional
        The file it came from, for messages and for finding files beside it.
    folder : Path, optional
        Where relative file names are looked for; default the folder of
        `file`, else the working directory.

    Raises
    ------
    InputError
        As for `read_case`.
    """
    if folder is None:
        folder = Path.cwd() if file is None else file.absolute().parent
    try:
        return _case(document, file, folder)
    except InputError as error:
        raise error.within(file=None if file is None else str(file)) from None


def case_document(case: Case) -> dict[str, Any]:
    """Return the case as resolved: every default filled in, in case-file keys and units.

    The result is itself a case document: `build_case` reads it back.
    """
    return dict(case.document)


def _case(document: Mapping[str, Any], file: Path | None, folder: Path) -> Case:
    tables = read_tables(document)
    _check_numbers(tables)
    shape = read_shape(tables.shape, folder)
    material = read_material(tables.material)
    # A body that is a mesh already says what faces it has only when it is read.
    places = Places(() if shape.family.mesh is not None else shape.solid().faces)
    settings = SolveSettings(
        modes=_modes_wanted(tables),
        up_to=tables.solve.up_to_hz,
        size=tables.solve.size,
        accuracy=tables.solve.accuracy_cents,
    )
    single = isinstance(document.get("mount"), Mapping)
    mounts = tuple(
        _mount(table, places, "mount" if single else f"mount.{i}", len(tables.mount))
        for i, table in enumerate(tables.mount, 1)
    )
    masses = tuple(
        _mass(table, places, f"attached_mass.{i}")
        for i, table in enumerate(tables.attached_mass, 1)
    )
    targets = tuple(
        _target(table, f"target.{i}", tables.pitch.a4_hz)
        for i, table in enumerate(tables.target, 1)
    )
    _refuse_repeats([target.mode for target in targets], "target")
    _refuse_repeats([row.mode for row in tables.measured], "measured")
    resolved = {
        "title": tables.title,
        "version": tables.version,
        "shape": shape_table(shape),
        "material": material_table(material),
        "mount": [plain(table) for table in tables.mount],
        "attached_mass": [plain(table) for table in tables.attached_mass],
        "pitch": plain(tables.pitch),
        "surroundings": plain(tables.surroundings),
        "solve": solve_table(settings),
        "target": [plain(table) for table in tables.target],
        "measured": [plain(table) for table in tables.measured],
        "expect": [plain(table) for table in tables.expect],
    }
    return Case(
        title=tables.title,
        shape=shape,
        material=material,
        mounts=mounts,
        attached_masses=masses,
        pitch=Pitch(a4=tables.pitch.a4_hz, reference_mode=tables.pitch.reference_mode),
        temperature=tables.surroundings.temperature_c,
        targets=targets,
        measured=tuple(Measured(mode=row.mode, frequency=row.hz) for row in tables.measured),
        expected=tuple(
            Expected(
                mode=row.mode,
                frequency=row.hz,
                tolerance_cents=row.tolerance_cents,
                source=row.source,
            )
            for row in tables.expect
        ),
        settings=settings,
        document=resolved,
        file=file,
    )


def solve_table(settings: SolveSettings) -> dict[str, Any]:
    """Return the settings as the case file would hold them."""
    table = {
        "modes": settings.modes,
        "up_to_hz": settings.up_to,
        "size": settings.size,
        "accuracy_cents": settings.accuracy,
    }
    return {key: value for key, value in table.items() if value is not None}


def _check_numbers(tables: CaseTables) -> None:
    if tables.version != 1:
        raise InputError("is not known", key="version", value=tables.version, allowed="1")
    A4_HZ.check(tables.pitch.a4_hz, "pitch.a4_hz")
    if tables.solve.accuracy_cents is not None:
        ACCURACY_CENTS.check(tables.solve.accuracy_cents, "solve.accuracy_cents")
        if tables.solve.size is not None:
            raise InputError(
                "has both size and accuracy_cents", key="solve", allowed="one of the two"
            )
    TEMPERATURE_C.check(tables.surroundings.temperature_c, "surroundings.temperature_c")


def _modes_wanted(tables: CaseTables) -> int | None:
    if tables.solve.modes is None and tables.solve.up_to_hz is None:
        return DEFAULT_MODES
    return tables.solve.modes


def _mount(table: MountTable, places: Places, key: str, count: int) -> Mount:
    hold = Hold(table.kind)
    if hold is Hold.FREE:
        if count > 1:
            raise InputError("a free part has no other mount", key=f"{key}.kind", value="free")
        _refuse(table, key, "faces", "axes", "normal_n_per_mm3", "tangential_n_per_mm3")
        return Mount(hold=hold)
    if table.faces is None:
        raise InputError(
            "is missing", key=f"{key}.faces", allowed=", ".join(places.faces) or "a list of faces"
        )
    faces = tuple(
        places.selector(face, f"{key}.faces.{i}") for i, face in enumerate(table.faces, 1)
    )
    if hold is Hold.HELD:
        _refuse(table, key, "normal_n_per_mm3", "tangential_n_per_mm3")
        if table.axes is None:
            raise InputError("is missing", key=f"{key}.axes", allowed='a list of "x", "y", "z"')
        return Mount(hold=hold, faces=faces, axes=tuple(sorted(set(table.axes))))
    _refuse(table, key, "axes")
    if hold is not Hold.SPRINGS:
        _refuse(table, key, "normal_n_per_mm3", "tangential_n_per_mm3")
        return Mount(hold=hold, faces=faces)
    normal, tangential = table.normal_n_per_mm3 or 0.0, table.tangential_n_per_mm3 or 0.0
    if normal == 0.0 and tangential == 0.0:
        raise InputError(
            "springs need a stiffness", key=key, allowed="normal_n_per_mm3, tangential_n_per_mm3"
        )
    for name, value in (("normal", normal), ("tangential", tangential)):
        if 0.0 < value < SOFTEST:
            raise InputError(
                "is so soft that the part is free to within rounding",
                key=f"{key}.{name}_n_per_mm3",
                value=value,
                allowed=f"0, or {SOFTEST:g} and more",
            )
    per_mm3 = 1e9  # N/mm3 in N/m3
    return Mount(
        hold=hold,
        faces=faces,
        normal_stiffness=normal * per_mm3,
        tangential_stiffness=tangential * per_mm3,
    )


def _refuse(table: MountTable, key: str, *names: str) -> None:
    for name in names:
        if getattr(table, name) is not None:
            raise InputError(
                f"does not go with kind = {table.kind!r}".replace("'", '"'), key=f"{key}.{name}"
            )


def _mass(table: AttachedMassTable, places: Places, key: str) -> AttachedMass:
    if (table.face is None) == (table.at is None):
        raise InputError("needs either a face or a point", key=key, allowed="face = or at =")
    if table.radius is not None and table.at is None:
        raise InputError("goes with at only", key=f"{key}.radius", value=table.radius)
    return AttachedMass(
        mass=table.grams * 1e-3,
        face=None if table.face is None else places.selector(table.face, f"{key}.face"),
        at=table.at,
        radius=table.radius,
    )


def _target(table: TargetTable, key: str, a4: float) -> Target:
    given = [name for name in ("note", "hz", "ratio") if getattr(table, name) is not None]
    if len(given) != 1:
        problem = "has both " + " and ".join(given) if given else "has no pitch"
        raise InputError(problem, key=key, allowed="one of note, hz, ratio with of")
    if (table.of is None) != (table.ratio is None):
        raise InputError("ratio and of go together", key=key)
    if table.of is not None and table.of == table.mode:
        raise InputError("is the mode itself", key=f"{key}.of", value=table.of)
    if table.cents is not None:
        if table.note is None:
            raise InputError("goes with a note only", key=f"{key}.cents", value=table.cents)
        CENTS.check(table.cents, f"{key}.cents")
    frequency = table.hz
    if table.note is not None:
        try:
            frequency = note_frequency(table.note, a4, table.cents or 0.0)
        except InputError as error:
            raise error.within(key=f"{key}.note") from None
    return Target(
        mode=table.mode,
        frequency=frequency,
        ratio=table.ratio,
        of=table.of,
        note=table.note,
        tolerance_cents=table.tolerance_cents,
        weight=table.weight,
    )


def _refuse_repeats(modes: list[str], key: str) -> None:
    for i, mode in enumerate(modes, 1):
        if mode in modes[: i - 1]:
            raise InputError("the same mode stands there twice", key=f"{key}.{i}.mode", value=mode)
