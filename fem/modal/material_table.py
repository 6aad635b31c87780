"""The library of materials: every value with where it comes from.

Values hold near 20 degrees C. Producers round hard and a modulus carries 2 to
3 % (17 to 26 cents in pitch): a part that must be right is measured, and the
case file overrides any value. A source that starts with ``from memory`` was
not looked up.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

from .material import Material, Triple

SHEETS = "producers' data sheets"
MEMORY = "from memory"
CREMER = "Cremer & Heckl, Structure-Borne Sound, 1988, within the range given"
WOOD = "USDA Wood Handbook FPL-GTR-190, Table 5-1, 12 % moisture"
WOOD_MEMORY = "from memory of USDA Wood Handbook FPL-GTR-190, Tables 5-1 and 5-3"
ASSUMED = "assumed: ratios of sugar maple, no published set known"

Cited = tuple[float, str]
CitedTriple = tuple[Triple, str]


@dataclass(frozen=True, eq=False, kw_only=True, slots=True)
class MaterialRow:
    """One material of the library.

    Attributes
    ----------
    material : Material
    sources : name of a `Material` field -> where its value comes from
    shear_modulus : Pa, as published for an isotropic material; a cross-check
        only, since E and nu fix G
    aliases : other names it answers to
    note : condition, scatter and choices, for people
    caution : what to mind in the workshop; empty if nothing special
    """

    material: Material
    sources: Mapping[str, str]
    shear_modulus: float | None = None
    aliases: tuple[str, ...] = ()
    note: str = ""
    caution: str = ""


def _row(
    name: str,
    *,
    e: Cited | CitedTriple,
    nu: Cited | CitedTriple,
    rho: Cited,
    g: CitedTriple | None = None,
    loss: Cited | None = None,
    alpha: Cited | None = None,
    slope: Cited | None = None,
    k: Cited | None = None,
    c: Cited | None = None,
    endurance: Cited | None = None,
    published_g: float | None = None,
    aliases: tuple[str, ...] = (),
    note: str = "",
    caution: str = "",
) -> MaterialRow:
    """Return a row from (value, source) pairs in SI."""
    cited = {
        "youngs_modulus": e,
        "poisson_ratio": nu,
        "density": rho,
        "shear_modulus": g,
        "loss_factor": loss,
        "expansion": alpha,
        "modulus_slope": slope,
        "conductivity": k,
        "specific_heat": c,
        "endurance": endurance,
    }
    known: dict[str, tuple[Any, str]] = {key: pair for key, pair in cited.items() if pair}
    return MaterialRow(
        material=Material(name=name, **{key: pair[0] for key, pair in known.items()}),
        sources={key: pair[1] for key, pair in known.items()},
        shear_modulus=published_g,
        aliases=aliases,
        note=note,
        caution=caution,
    )


def _wood(
    name: str,
    *,
    el: Cited,
    ratios: tuple[float, float, float, float, float],
    poisson: tuple[float, float, float],
    gravity: float,
    source: str,
    loss: Cited,
    note: str = "",
    rho: Cited | None = None,
    g_source: str | None = None,
) -> MaterialRow:
    """Return a flat-sawn wood: x = longitudinal, y = tangential, z = radial.

    `ratios` are ER, ET, GLR, GLT, GRT over EL; `poisson` nuLR, nuLT, nuRT.
    nuTR follows from nuRT ET/ER, so that the stiffness matrix is symmetric.
    Density is 1.12 times the specific gravity at 12 % moisture.
    """
    (length, el_source), (er, et, glr, glt, grt) = el, ratios
    nu_lr, nu_lt, nu_rt = poisson
    return _row(
        name,
        e=((length, et * length, er * length), f"{el_source}; ratios: {source}"),
        g=((glt * length, glr * length, grt * length), g_source or source),
        nu=((nu_lt, nu_lr, nu_rt * et / er), source),
        rho=rho or (1120.0 * gravity, source),
        loss=loss,
        note=(
            "Flat-sawn at 12 % moisture: x along the grain, y tangential, z radial; "
            f"pieces of one species differ by 20 % and more. {note}"
        ).strip(),
        caution="fine dust of hardwoods is harmful: extract it",
    )


_ROWS = (
    # --- steels and iron -------------------------------------------------
    _row(
        "carbon steel",
        e=(202e9, SHEETS),
        nu=(0.29, MEMORY),
        rho=(7850.0, MEMORY),
        loss=(1e-4, CREMER),
        alpha=(12e-6, SHEETS),
        slope=(-260e-6, MEMORY),
        k=(49.0, SHEETS),
        c=(470.0, SHEETS),
        endurance=(250e6, MEMORY),
        aliases=("steel", "mild steel"),
        note="Over 0.3 % carbon; static tables give a modulus slope of -330e-6 /K.",
    ),
    _row(
        "spring steel 1095",
        e=(205e9, MEMORY),
        nu=(0.29, MEMORY),
        rho=(7850.0, MEMORY),
        loss=(1e-4, CREMER),
        alpha=(11.5e-6, MEMORY),
        slope=(-260e-6, MEMORY),
        k=(47.0, MEMORY),
        c=(470.0, MEMORY),
        endurance=(500e6, MEMORY),
        aliases=("spring steel",),
        note="Hardened and tempered strip.",
    ),
    _row(
        "music wire",
        e=(203.4e9, SHEETS),
        nu=(0.29, SHEETS),
        rho=(7800.0, SHEETS),
        loss=(1e-4, CREMER),
        alpha=(12e-6, SHEETS),
        slope=(-260e-6, MEMORY),
        k=(49.0, SHEETS),
        c=(470.0, SHEETS),
        endurance=(600e6, MEMORY),
        published_g=82.7e9,
        aliases=("music wire A228",),
        note=(
            "ASTM A228, up to 0.8 mm; thicker wire is listed softer, down to 193.1 GPa "
            "at 3.2 to 6.4 mm."
        ),
    ),
    _row(
        "stainless steel 304",
        e=(193e9, SHEETS),
        nu=(0.29, SHEETS),
        rho=(8000.0, SHEETS),
        loss=(2e-4, CREMER),
        alpha=(17.3e-6, SHEETS),
        slope=(-390e-6, MEMORY),
        k=(16.2, SHEETS),
        c=(500.0, SHEETS),
        endurance=(210e6, SHEETS),
        published_g=77e9,
        aliases=("stainless steel",),
        note="Annealed; sheets give 193 to 200 GPa, cold-rolled strip is directional.",
    ),
    _row(
        "stainless steel 316",
        e=(193e9, MEMORY),
        nu=(0.29, MEMORY),
        rho=(8000.0, MEMORY),
        loss=(2e-4, CREMER),
        alpha=(16.0e-6, MEMORY),
        slope=(-390e-6, MEMORY),
        k=(15.0, MEMORY),
        c=(500.0, MEMORY),
        endurance=(240e6, MEMORY),
        published_g=77e9,
        note="Annealed.",
    ),
    _row(
        "stainless steel 17-7PH",
        e=(204e9, MEMORY),
        nu=(0.28, MEMORY),
        rho=(7800.0, MEMORY),
        loss=(2e-4, CREMER),
        alpha=(11.0e-6, MEMORY),
        slope=(-330e-6, MEMORY),
        k=(16.4, MEMORY),
        c=(460.0, MEMORY),
        endurance=(550e6, MEMORY),
        published_g=77e9,
        note="Cold-rolled and aged spring strip (condition CH900).",
    ),
    _row(
        "tool steel O1",
        e=(207e9, MEMORY),
        nu=(0.29, MEMORY),
        rho=(7830.0, MEMORY),
        loss=(1e-4, CREMER),
        alpha=(11.2e-6, MEMORY),
        slope=(-260e-6, MEMORY),
        k=(43.0, MEMORY),
        c=(460.0, MEMORY),
        endurance=(500e6, MEMORY),
        note="Hardened and tempered.",
    ),
    _row(
        "grey cast iron",
        e=(110e9, MEMORY),
        nu=(0.26, MEMORY),
        rho=(7200.0, MEMORY),
        loss=(5e-3, MEMORY),
        alpha=(11e-6, MEMORY),
        slope=(-400e-6, MEMORY),
        k=(50.0, MEMORY),
        c=(490.0, MEMORY),
        endurance=(90e6, MEMORY),
        note="Modulus falls with strain and varies from 70 to 140 GPa with the grade.",
    ),
    _row(
        "constant-modulus alloy N09902",
        e=(180e9, SHEETS),
        nu=(0.3, MEMORY),
        rho=(8050.0, SHEETS),
        loss=(5e-5, MEMORY),
        alpha=(7.6e-6, SHEETS),
        slope=(0.0, f"{SHEETS}: set by cold work and ageing"),
        k=(12.0, MEMORY),
        c=(500.0, MEMORY),
        endurance=(350e6, MEMORY),
        published_g=66e9,
        aliases=("alloy 902",),
        note=(
            "165 to 200 GPa and a modulus slope of -38 to +55e-6 /K by cold work and ageing; "
            "ask for the slope you need, and measure it."
        ),
    ),
    # --- copper alloys ---------------------------------------------------
    _row(
        "copper C110",
        e=(117e9, MEMORY),
        nu=(0.34, MEMORY),
        rho=(8910.0, MEMORY),
        loss=(2e-3, CREMER),
        alpha=(17.0e-6, MEMORY),
        slope=(-380e-6, MEMORY),
        k=(388.0, MEMORY),
        c=(385.0, MEMORY),
        endurance=(76e6, MEMORY),
        published_g=44e9,
        aliases=("copper",),
    ),
    _row(
        "brass C260",
        e=(110e9, SHEETS),
        nu=(0.31, SHEETS),
        rho=(8530.0, SHEETS),
        loss=(4e-4, CREMER),
        alpha=(20e-6, SHEETS),
        slope=(-360e-6, MEMORY),
        k=(120.0, SHEETS),
        c=(390.0, SHEETS),
        endurance=(150e6, MEMORY),
        published_g=41e9,
        aliases=("brass",),
        note="70/30 cartridge brass, cold-rolled.",
    ),
    _row(
        "brass C360",
        e=(97e9, SHEETS),
        nu=(0.31, SHEETS),
        rho=(8490.0, SHEETS),
        loss=(4e-4, CREMER),
        alpha=(20.5e-6, SHEETS),
        slope=(-360e-6, MEMORY),
        k=(115.0, SHEETS),
        c=(380.0, SHEETS),
        endurance=(140e6, MEMORY),
        published_g=37e9,
        note="Free-cutting brass.",
        caution="holds about 3 % lead: wash hands, keep chips and dust out of the air",
    ),
    _row(
        "brass C464",
        e=(100e9, MEMORY),
        nu=(0.31, MEMORY),
        rho=(8410.0, MEMORY),
        loss=(4e-4, CREMER),
        alpha=(21.2e-6, MEMORY),
        slope=(-360e-6, MEMORY),
        k=(116.0, MEMORY),
        c=(380.0, MEMORY),
        endurance=(100e6, MEMORY),
        published_g=39e9,
        aliases=("naval brass",),
    ),
    _row(
        "phosphor bronze C510",
        e=(110e9, SHEETS),
        nu=(0.34, SHEETS),
        rho=(8860.0, SHEETS),
        loss=(3e-4, MEMORY),
        alpha=(17.8e-6, SHEETS),
        slope=(-380e-6, MEMORY),
        k=(76.0, SHEETS),
        c=(380.0, SHEETS),
        endurance=(150e6, SHEETS),
        published_g=42e9,
        aliases=("phosphor bronze",),
        note="Spring temper H08 (H04: 185 MPa endurance).",
    ),
    _row(
        "bell bronze CuSn20",
        e=(100e9, MEMORY),
        nu=(0.34, MEMORY),
        rho=(8700.0, MEMORY),
        loss=(3e-4, MEMORY),
        alpha=(17.5e-6, MEMORY),
        slope=(-380e-6, MEMORY),
        k=(40.0, MEMORY),
        c=(375.0, MEMORY),
        aliases=("bell bronze",),
        note="95 to 110 GPa by casting; brittle, so no endurance is given.",
    ),
    _row(
        "nickel silver C752",
        e=(125e9, MEMORY),
        nu=(0.33, MEMORY),
        rho=(8730.0, MEMORY),
        loss=(4e-4, MEMORY),
        alpha=(16.2e-6, MEMORY),
        slope=(-370e-6, MEMORY),
        k=(33.0, MEMORY),
        c=(380.0, MEMORY),
        endurance=(140e6, MEMORY),
        published_g=47e9,
        aliases=("nickel silver",),
    ),
    _row(
        "beryllium copper C172",
        e=(131e9, SHEETS),
        nu=(0.33, SHEETS),
        rho=(8250.0, SHEETS),
        loss=(2e-4, MEMORY),
        alpha=(17.4e-6, SHEETS),
        slope=(-350e-6, MEMORY),
        k=(118.0, SHEETS),
        c=(420.0, SHEETS),
        endurance=(240e6, MEMORY),
        published_g=50e9,
        aliases=("beryllium copper",),
        note="Age-hardened; the modulus rises by about 5 % with ageing.",
        caution="its dust and fumes can cause lasting lung disease: never grind or heat it dry",
    ),
    # --- light metals ----------------------------------------------------
    _row(
        "aluminium 6061-T6",
        e=(68.9e9, SHEETS),
        nu=(0.33, SHEETS),
        rho=(2700.0, SHEETS),
        loss=(1e-4, CREMER),
        alpha=(23.6e-6, SHEETS),
        slope=(-528e-6, "NIST fit of E(T) for 6061-T6, 2 to 295 K, slope at 293 K"),
        k=(167.0, SHEETS),
        c=(896.0, SHEETS),
        endurance=(96.5e6, SHEETS),
        published_g=26e9,
        aliases=("aluminium", "aluminum", "aluminum 6061-T6"),
        note="Endurance at 5e8 cycles.",
    ),
    _row(
        "aluminium 7075-T6",
        e=(71.7e9, SHEETS),
        nu=(0.33, SHEETS),
        rho=(2810.0, SHEETS),
        loss=(1e-4, CREMER),
        alpha=(23.6e-6, SHEETS),
        slope=(-520e-6, MEMORY),
        k=(130.0, SHEETS),
        c=(960.0, SHEETS),
        endurance=(159e6, SHEETS),
        published_g=26.9e9,
        aliases=("aluminum 7075-T6",),
        note="Sheets disagree about conductivity (130 to 150) and specific heat (715 to 960).",
    ),
    _row(
        "aluminium 2024-T3",
        e=(73.1e9, MEMORY),
        nu=(0.33, MEMORY),
        rho=(2780.0, MEMORY),
        loss=(1e-4, CREMER),
        alpha=(23.2e-6, MEMORY),
        slope=(-520e-6, MEMORY),
        k=(121.0, MEMORY),
        c=(875.0, MEMORY),
        endurance=(138e6, MEMORY),
        published_g=28e9,
        aliases=("aluminum 2024-T3",),
    ),
    _row(
        "titanium Ti-6Al-4V",
        e=(113.8e9, SHEETS),
        nu=(0.342, SHEETS),
        rho=(4430.0, SHEETS),
        loss=(1e-4, MEMORY),
        alpha=(8.6e-6, SHEETS),
        slope=(-550e-6, MEMORY),
        k=(6.7, SHEETS),
        c=(560.0, SHEETS),
        endurance=(530e6, SHEETS),
        published_g=44e9,
        aliases=("titanium",),
        note="Annealed; rolled stock is directional, 114 to 129 GPa have been measured.",
        caution="fine chips burn: keep sparks and heat away",
    ),
    _row(
        "magnesium AZ31",
        e=(45e9, MEMORY),
        nu=(0.35, MEMORY),
        rho=(1770.0, MEMORY),
        loss=(1e-4, CREMER),
        alpha=(26e-6, MEMORY),
        slope=(-500e-6, MEMORY),
        k=(96.0, MEMORY),
        c=(1000.0, MEMORY),
        endurance=(90e6, MEMORY),
        published_g=17e9,
        caution="fine chips burn fiercely and must not be put out with water",
    ),
    # --- others ----------------------------------------------------------
    _row(
        "silver 925",
        e=(75e9, MEMORY),
        nu=(0.37, MEMORY),
        rho=(10360.0, MEMORY),
        loss=(4e-4, CREMER),
        alpha=(19e-6, MEMORY),
        slope=(-450e-6, MEMORY),
        k=(361.0, MEMORY),
        c=(245.0, MEMORY),
        aliases=("sterling silver",),
        note="Loss factor: of pure silver.",
    ),
    _row(
        "tungsten",
        e=(411e9, MEMORY),
        nu=(0.28, MEMORY),
        rho=(19250.0, MEMORY),
        loss=(5e-5, MEMORY),
        alpha=(4.5e-6, MEMORY),
        slope=(-90e-6, MEMORY),
        k=(173.0, MEMORY),
        c=(134.0, MEMORY),
        published_g=161e9,
    ),
    _row(
        "nickel 200",
        e=(204e9, MEMORY),
        nu=(0.31, MEMORY),
        rho=(8890.0, MEMORY),
        loss=(8e-4, CREMER),
        alpha=(13.3e-6, MEMORY),
        slope=(-300e-6, MEMORY),
        k=(70.0, MEMORY),
        c=(456.0, MEMORY),
        endurance=(150e6, MEMORY),
        published_g=81e9,
        aliases=("nickel",),
        note="Modulus and loss depend on magnetisation.",
    ),
    _row(
        "soda-lime glass",
        e=(74e9, SHEETS),
        nu=(0.23, SHEETS),
        rho=(2530.0, SHEETS),
        loss=(1e-3, MEMORY),
        alpha=(9.5e-6, SHEETS),
        slope=(-150e-6, MEMORY),
        k=(1.0, SHEETS),
        c=(800.0, SHEETS),
        published_g=29.8e9,
        aliases=("glass",),
        note="Window glass.",
    ),
    _row(
        "fused silica",
        e=(72.6e9, MEMORY),
        nu=(0.17, MEMORY),
        rho=(2203.0, MEMORY),
        loss=(1e-5, MEMORY),
        alpha=(0.55e-6, MEMORY),
        slope=(180e-6, MEMORY),
        k=(1.38, MEMORY),
        c=(740.0, MEMORY),
        published_g=31e9,
        note="Stiffens as it warms.",
    ),
    # --- woods -----------------------------------------------------------
    _wood(
        "sugar maple",
        el=(13.86e9, "USDA Wood Handbook bending modulus 12.6 GPa, raised by 10 % for shear"),
        ratios=(0.132, 0.065, 0.111, 0.063, 0.021),
        poisson=(0.424, 0.476, 0.774),
        gravity=0.63,
        source=WOOD,
        g_source=f"{WOOD}; yz assumed 0.021 EL, not listed",
        loss=(1e-2, MEMORY),
    ),
    _wood(
        "Sitka spruce",
        el=(11.9e9, "from memory: bending modulus 10.8 GPa, raised by 10 % for shear"),
        ratios=(0.078, 0.043, 0.064, 0.061, 0.003),
        poisson=(0.372, 0.467, 0.435),
        gravity=0.40,
        source=WOOD_MEMORY,
        loss=(7e-3, MEMORY),
    ),
    _wood(
        "yellow birch",
        el=(15.3e9, "from memory: bending modulus 13.9 GPa, raised by 10 % for shear"),
        ratios=(0.078, 0.050, 0.074, 0.068, 0.017),
        poisson=(0.426, 0.451, 0.697),
        gravity=0.62,
        source=WOOD_MEMORY,
        loss=(9e-3, MEMORY),
    ),
    _wood(
        "Honduran rosewood",
        el=(21e9, "Bremaud, JASA 131 (2012) 807: 17 to 26 GPa"),
        ratios=(0.132, 0.065, 0.111, 0.063, 0.021),
        poisson=(0.424, 0.476, 0.774),
        gravity=0.0,
        rho=(1000.0, MEMORY),
        source=ASSUMED,
        loss=(6e-3, MEMORY),
        note="Only the modulus along the grain is known; fit the rest to a tapped bar.",
    ),
)

#: Name -> row, in the order shown to people.
MATERIALS: dict[str, MaterialRow] = {row.material.name: row for row in _ROWS}
