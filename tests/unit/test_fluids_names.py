"""Fluids by name: aliases, near spellings, declarations, citations, and what never reaches the property library."""

from __future__ import annotations

import subprocess
import sys

import pytest

from service.errors import CaseError, SchemaViolation, UnknownFluid
from service.fluids import fluid_names, names
from service.fluids.catalogue import KEPT, FluidCatalogue
from service.fluids.protocol import FluidSpec

CATALOGUE = FluidCatalogue()


@pytest.mark.parametrize(
    ("said", "meant"),
    [
        ("water", "water"), ("Water", "water"), ("H2O", "water"), ("steam", "water"), ("R718", "water"),
        ("nitrogen", "nitrogen"), ("N2", "nitrogen"), ("air", "air"), ("dry air", "air"), ("R134a", "R134a"),
        ("r-134A", "R134a"), ("HFC-134a", "R134a"), ("Freon 22", "R22"), ("CO2", "carbon dioxide"),
        ("R744", "carbon dioxide"),
        ("carbon_dioxide", "carbon dioxide"), ("NH3", "ammonia"), ("R-717", "ammonia"), ("propane", "propane"),
        ("R290", "propane"), ("sulphur dioxide", "sulfur dioxide"), ("ethene", "ethylene"),
        ("R1234ze(E)", "R1234ze(E)"),
        ("R1234zeE", "R1234ze(E)"), ("HFO-1234yf", "R1234yf"), ("7732-18-5", "water"), ("n-butane", "n-butane"),
        ("butane", "n-butane"), ("Puron", "R410A"),
    ],
)  # fmt: skip
def test_a_fluid_answers_to_its_usual_names(said: str, meant: str) -> None:
    assert CATALOGUE.resolve(said).name == meant


def test_every_listed_name_resolves_to_a_fluid_of_that_name() -> None:
    listed = CATALOGUE.names()
    assert len(listed) >= 136  # pure and pseudo-pure fluids of the library, 8.0
    assert len(set(listed)) == len(listed)
    assert {"water", "air", "humid_air", "R134a"} <= set(listed)
    for name in names.own_names():
        assert names.own_name(names.library_name(name) or "") == name


def test_no_alias_means_two_fluids() -> None:
    seen: dict[str, str] = {}
    for fluid in set(names.table().values()):
        for alias in (fluid, names.own_name(fluid), *names.aliases(fluid)):
            assert seen.setdefault(names.key(alias), fluid) == fluid
    assert set(fluid_names.ALIASES) <= set(names.table().values())
    assert set(fluid_names.NAMES) <= set(names.table().values())


@pytest.mark.parametrize(
    ("typo", "hint"), [("watr", "water"), ("nitogen", "nitrogen"), ("R134", "R134a"), ("amonia", "ammonia")]
)
def test_a_misspelt_name_is_answered_with_near_spellings(typo: str, hint: str) -> None:
    with pytest.raises(UnknownFluid) as caught:
        CATALOGUE.resolve(typo)
    assert hint in caught.value.issues[0].hint
    assert typo in caught.value.detail


@pytest.mark.parametrize(
    "text",
    ["", "REFPROP::Water", "IF97::Water", "BICUBIC&HEOS::Water", "HEOS::Water&Ethanol", "Water[0.5]&Ethanol[0.5]",
     "unobtainium", "x" * 100_000, "\x00", "water\nnitrogen", "{0}", "INCOMP::MEG[0.2]"],
)  # fmt: skip
def test_what_is_no_name_is_refused_briefly(text: str) -> None:
    with pytest.raises(UnknownFluid) as caught:
        CATALOGUE.resolve(text)
    assert len(caught.value.detail) < 120
    assert len(caught.value.issues[0].hint) < 200


def test_a_solution_by_name_alone_asks_for_its_mass_fraction() -> None:
    with pytest.raises(UnknownFluid) as caught:
        CATALOGUE.resolve("MEG")
    assert "mass_fraction" in caught.value.issues[0].hint


@pytest.mark.parametrize(
    "spec",
    [
        FluidSpec("pure"), FluidSpec("pure", name="water", model="cubic"),
        FluidSpec("pure", name="nitrogen", model="IF97"),
        FluidSpec("pure", name="humid_air"), FluidSpec("plasma", name="argon"), FluidSpec("brine"),
        FluidSpec("gas_mixture"), FluidSpec("pure", name="MEG", mass_fraction=0.3),
    ],
    ids=str,
)  # fmt: skip
def test_a_declaration_that_makes_no_fluid_is_refused(spec: FluidSpec) -> None:
    with pytest.raises(CaseError) as caught:
        CATALOGUE.resolve(spec)
    assert caught.value.issues[0].hint


@pytest.mark.parametrize(
    "spec",
    [
        FluidSpec("ideal_gas", cp=1000.0), FluidSpec("ideal_gas", molar_mass=0.029),
        FluidSpec("ideal_gas", molar_mass=0.029, cp=200.0), FluidSpec("ideal_gas", molar_mass=29.0, cp=1000.0),
        FluidSpec("ideal_gas", molar_mass=float("nan"), cp=1000.0), FluidSpec("constant_liquid", cp=2000.0),
        FluidSpec("constant_liquid", cp=-1.0, density=800.0), FluidSpec("solid", cp=500.0, density=float("inf")),
    ],
    ids=str,
)  # fmt: skip
def test_constants_that_cannot_be_are_refused(spec: FluidSpec) -> None:
    with pytest.raises(SchemaViolation) as caught:
        CATALOGUE.resolve(spec)
    assert caught.value.issues[0].hint


def test_a_fluid_is_built_once() -> None:
    assert CATALOGUE.resolve("water") is CATALOGUE.resolve("H2O")
    assert CATALOGUE.resolve(FluidSpec("pure", name="water", label="feed")) is CATALOGUE.resolve("water")
    declared = FluidSpec("ideal_gas", molar_mass=0.029, cp=1000.0, label="a")
    assert CATALOGUE.resolve(declared) is CATALOGUE.resolve(
        FluidSpec("ideal_gas", molar_mass=0.029, cp=1000.0, label="a")
    )


def test_the_two_models_of_water_share_a_name_and_not_a_model() -> None:
    a, b = CATALOGUE.resolve("water"), CATALOGUE.resolve(FluidSpec("pure", name="H2O", model="if97"))
    assert a.name == b.name
    assert a.provenance.model != b.provenance.model


def test_declared_fluids_do_not_pile_up() -> None:
    catalogue = FluidCatalogue()
    for k in range(KEPT + 50):
        catalogue.resolve(FluidSpec("solid", density=1000.0 + k, cp=500.0))
    assert len(catalogue._declared) == KEPT


def test_spellings_do_not_pile_up() -> None:
    catalogue = FluidCatalogue()
    for k in range(20):
        catalogue.resolve("w" + "-" * k + "ater")
    assert len(catalogue._named) == 1


@pytest.mark.parametrize("name", names.own_names())
def test_every_fluid_has_limits_a_citation_and_a_zero(name: str) -> None:
    fluid = CATALOGUE.resolve(name)
    limits, source = fluid.limits, fluid.provenance
    assert 0.0 < limits.T_min < limits.T_max
    assert limits.p_critical is not None
    assert limits.p_triple is not None
    assert 0.0 < limits.p_triple < limits.p_critical < limits.p_max * 10
    assert len(source.citation) > 30
    assert "{" not in source.citation
    assert "\\" not in source.citation
    assert any(year in source.citation for year in ("(19", "(20"))
    assert source.reference_state.startswith("h = ")
    assert fluid.molar_mass is not None
    assert 0.002 < fluid.molar_mass < 0.5


@pytest.mark.parametrize(
    ("name", "text"),
    [
        ("water", "Wagner"), ("nitrogen", "Span"), ("R134a", "Tillner-Roth"), ("air", "Lemmon"),
        ("carbon dioxide", "Span"), ("propane", "Lemmon"),
    ],
)  # fmt: skip
def test_citations_name_the_authors_of_the_equation(name: str, text: str) -> None:
    """Authors: W. Wagner and A. Pruss (IAPWS-95), R. Span et al. (nitrogen), and so on; from memory."""
    assert text in CATALOGUE.resolve(name).provenance.citation


@pytest.mark.parametrize(
    ("name", "pair", "values", "h", "s", "told"),
    [
        ("water", ("T", "x"), (273.16, 0.0), 0.0, 0.0, "triple point"),
        ("R134a", ("T", "x"), (273.15, 0.0), 2e5, 1e3, "IIR"),
        ("propane", ("T", "x"), (273.15, 0.0), 2e5, 1e3, "IIR"),
        ("methane", ("p", "x"), (101325.0, 0.0), 0.0, 0.0, "normal boiling point"),
        ("air", ("p", "x"), (101325.0, 0.0), 0.0, 0.0, "normal boiling point"),
        ("nitrogen", ("p", "T"), (1e5, 298.15), 309270.0, 6839.2, "h = 309.27 kJ/kg"),
    ],
)  # fmt: skip
def test_the_zero_that_is_told_is_the_zero_that_is_used(
    name: str, pair: tuple[str, str], values: tuple[float, float], h: float, s: float, told: str
) -> None:
    fluid = CATALOGUE.resolve(name)
    found = fluid.state(pair, values).values
    assert found["h"] == pytest.approx(h, abs=100.0)  # of a heat of evaporation of some 2e5 J/kg
    assert found["s"] == pytest.approx(s, abs=1.0)
    assert told in fluid.provenance.reference_state


def test_a_description_tells_aliases_and_models() -> None:
    told = CATALOGUE.describe("steam")
    assert told["name"] == "water"
    assert "R718" in told["aliases"]
    assert told["models"] == ["helmholtz", "IF97"]
    assert CATALOGUE.describe("humid_air")["kind"] == "humid_air"


def test_importing_the_fluids_builds_nothing() -> None:
    code = (
        "import service.fluids.catalogue, service.fluids.names as n, service.fluids.citations as c;"
        "assert n.table.cache_info().currsize == 0 and c._entries.cache_info().currsize == 0;"
        "f = service.fluids.catalogue.FluidCatalogue(); assert n.table.cache_info().currsize == 0"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=False)
    assert done.returncode == 0, done.stderr
