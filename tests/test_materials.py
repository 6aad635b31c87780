from dataclasses import fields

import numpy as np
import pytest
from modewright.fem.modal.material import Material
from modewright.fem.modal.material_table import MATERIALS
from modewright.fem.modal.materials import find_material
from modewright.geometry.errors import InputError

PROPERTIES = [f.name for f in fields(Material) if f.name != "name"]
rows = pytest.mark.parametrize("row", MATERIALS.values(), ids=list(MATERIALS))


def test_enough_materials_of_both_kinds():
    assert len(MATERIALS) >= 22
    assert sum(row.material.orthotropic for row in MATERIALS.values()) >= 3


@rows
def test_each_value_has_a_source_and_each_source_a_value(row):
    filled = {p for p in PROPERTIES if getattr(row.material, p) is not None}
    assert filled == set(row.sources)
    assert all(row.sources.values())


@rows
def test_the_material_is_stable(row):
    assert np.linalg.eigvalsh(row.material.stiffness()).min() > 0


@rows
def test_magnitudes_are_those_of_solids_in_si(row):
    m = row.material
    assert 300 < m.density < 20000
    assert 5e9 < m.axial_modulus < 5e11
    assert 1000 < np.sqrt(m.axial_modulus / m.density) < 6500  # sound speed along a bar, m/s
    assert m.loss_factor is None or 1e-6 < m.loss_factor < 0.1
    assert m.expansion is None or 1e-7 < m.expansion < 4e-5
    assert m.modulus_slope is None or abs(m.modulus_slope) < 1e-3
    assert m.conductivity is None or 0.1 < m.conductivity < 450
    assert m.specific_heat is None or 100 < m.specific_heat < 1100
    assert m.endurance is None or 2e7 < m.endurance < 1e9


@rows
def test_published_shear_modulus_agrees(row):
    if row.shear_modulus is not None:
        e, nu = row.material.youngs_modulus, row.material.poisson_ratio
        assert row.shear_modulus == pytest.approx(e / (2 * (1 + nu)), rel=0.05)


def test_thermoelastic_strength_of_aluminium():
    # Zener's Delta = E alpha^2 T / (rho c): 4.65e-3 for 6061-T6 at 293.15 K, recomputed
    # from producers' data sheets; ties five of the properties together.
    m = MATERIALS["aluminium 6061-T6"].material
    delta = m.youngs_modulus * m.expansion**2 * 293.15 / (m.density * m.specific_heat)
    assert delta == pytest.approx(4.65e-3, rel=0.002)


def test_sugar_maple_is_flat_sawn_with_consistent_ratios():
    # Wood Handbook ratios, axes L T R: EL 13.86 GPa, nuTR = nuRT ET/ER = 0.3811
    m = MATERIALS["sugar maple"].material
    assert m.youngs_modulus == pytest.approx((13.86e9, 0.065 * 13.86e9, 0.132 * 13.86e9))
    assert m.shear_modulus == pytest.approx((0.063 * 13.86e9, 0.111 * 13.86e9, 0.021 * 13.86e9))
    assert m.poisson_ratio == pytest.approx((0.476, 0.424, 0.3811), abs=1e-4)
    assert m.density == pytest.approx(705.6)


def test_names_and_aliases_are_unique_and_found():
    names = [
        word.casefold() for row in MATERIALS.values() for word in (row.material.name, *row.aliases)
    ]
    assert len(names) == len(set(names))
    assert find_material("Brass  c260") is MATERIALS["brass C260"]
    assert find_material("aluminum 6061-T6") is MATERIALS["aluminium 6061-T6"]


def test_an_unknown_name_gets_the_nearest():
    with pytest.raises(InputError, match=r"material\.name: .*'brass C260'") as caught:
        find_material("bras C260")
    assert caught.value.key == "material.name"
    with pytest.raises(InputError, match="no such material, got"):
        find_material("xyzzy")


def test_dangerous_dust_is_told():
    assert "lung" in MATERIALS["beryllium copper C172"].caution
    assert "lead" in MATERIALS["brass C360"].caution
