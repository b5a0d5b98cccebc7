"""Ledger: every line, that it adds up, and that a mistake would show."""

from dataclasses import replace

import numpy as np
import pytest

from explorer.scenario.errors import ScenarioError
from explorer.scenario.evaluate import evaluate
from explorer.scenario.files import open_scenario
from explorer.scenario.shipped import shipped
from explorer.studies.ledger import CLOSED, SUM, ledger

LEDGERS = [
    (name, option, season)
    for name, path in shipped().items()
    for option, scenario in enumerate(
        [open_scenario(path), *(o.scenario for o in open_scenario(path).options)]
    )
    for season in scenario.seasons
]


def made(scenario, **dials):
    return ledger(scenario, evaluate(scenario, dials))


def amounts(book, key, kind=None):
    """Amounts of a column by text of the line, of one kind or of all that count."""
    place = book.column(key)
    return {
        line.text: line.amounts[place]
        for line in book.lines
        if (line.kind == kind if kind else line.kind != SUM) and line.amounts[place]
    }


# ---- that it adds up ---------------------------------------------------------------------------------------


@pytest.mark.parametrize(("name", "option", "season"), LEDGERS)
def test_the_ledger_of_every_shipped_plant_closes(name, option, season):
    """All columns to 1e-9, and the end of it is the finished water of the readouts."""
    scenario = open_scenario(shipped()[name])
    scenario = scenario if option == 0 else scenario.options[option - 1].scenario
    outcome = evaluate(scenario, season=season)
    book = ledger(scenario, outcome)
    assert book.closed
    assert np.abs(book.relative).max() <= CLOSED
    counted = np.sum([line.amounts for line in book.lines if line.kind != SUM], axis=0)
    assert counted == pytest.approx(book.finished, rel=1e-9, abs=1e-9)
    for key in ("alkalinity", "dic", "calcium", "hardness", "chloride"):
        assert book.finished[book.column(key)] == pytest.approx(float(outcome.readout(key)), rel=1e-9)


def everything(plant):
    """A plant with every kind of step, one inside the other, and chlorine that meets ammonia."""
    raw = plant.dict({"river": 50, "well": 30, "permeate": 20})
    raw["waters"][0]["train"] = [
        plant.dosed("alum", "aluminium_sulfate", 30, "mg/L"),
        {"id": "filters", "step": "settle"},
        plant.held("lift", "sodium_hydroxide", "ph", 8.5, 60, "mg/L"),
    ]
    raw["waters"][1]["analyses"]["winter"]["ammonia"] = {"value": 0.4, "unit": "mg/L as N"}
    softener = [
        plant.dosed("lime", "calcium_hydroxide", 250, "mg/L"),
        {"id": "clarifier", "step": "settle", "residual": 10, "solids": ["calcite", "brucite"]},
    ]
    raw["waters"][1]["train"] = [{"id": "softener", "step": "side_stream", "fraction": 60, "train": softener}]
    inner = {"id": "bypass", "step": "side_stream", "fraction": 30, "train": []}
    inner["train"] = [plant.dosed("gas", "carbon_dioxide", 40, "mg/L")]
    bed = [inner, {"id": "bed", "step": "limestone", "approach": 80}]
    raw["waters"][2]["train"] = [{"id": "contactor", "step": "side_stream", "fraction": 50, "train": bed}]
    raw["train"] = [
        plant.dosed("hypo", "sodium_hypochlorite", 3, "mg/L as Cl2"),
        plant.dosed("polymer", "polyaluminium_chloride", 0.5, "mg/L as Al", basicity=70),
        {"id": "sand", "step": "settle"},
        {"id": "tower", "step": "air", "approach": 70},
        {"id": "heater", "step": "temperature", "temperature": {"value": 30, "unit": "°C"}},
        {"id": "circuit", "step": "concentrate", "cycles": 3},
        plant.dosed("acid", "sulfuric_acid", 40, "mg/L"),
    ]
    return plant.read(raw)


def test_a_plant_with_every_kind_of_step_closes(plant):
    """Side streams in side streams, floc, softening, limestone, air, concentration, completed chlorine."""
    book = made(everything(plant))
    assert book.closed
    assert {line.kind for line in book.lines} == {"source", "dose", "solid", "gas", "reaction", "water", SUM}


@pytest.mark.parametrize(
    ("key", "eq_or_mol", "residual"), [("alkalinity", 2e-5, 1.0), ("boron", 1e-5, 0.108), ("dic", 1e-5, 0.12)]
)
def test_what_no_stoichiometry_explains_is_shown(plant, key, eq_or_mol, residual):
    """A milligram smuggled into the finished water does not close, even of what nothing else brings."""
    scenario = plant({"well": 100}, [plant.dosed("caustic", "sodium_hydroxide", 10, "mg/L")])
    outcome = evaluate(scenario)
    stage = outcome.stage()
    totals = stage.stream.totals.copy()
    totals[stage.system.index[key]] += eq_or_mol
    stage.stream = replace(stage.stream, totals=totals)
    book = ledger(scenario, outcome)
    assert not book.closed
    assert book.residual[book.column(key)] == pytest.approx(residual, abs=0.01)
    assert book.residual[book.column("sodium")] == pytest.approx(0.0, abs=1e-9)


# ---- the lines ---------------------------------------------------------------------------------------------


def test_sources_come_in_by_their_share(plant):
    """0.6 × 64 and 0.4 × 272 mg/L of alkalinity; hand arithmetic."""
    book = made(plant({"river": 60, "well": 40}))
    assert amounts(book, "alkalinity") == pytest.approx(
        {"River, 60 % of the blend": 38.4, "Well, 40 % of the blend": 108.8}
    )


def test_a_dose_in_the_train_of_a_water_counts_by_its_share(plant):
    """10 mg/L of caustic is 5.75 mg/L of sodium; a quarter of the blend brings a quarter of it."""
    raw = plant.dict({"river": 75, "well": 25})
    raw["waters"][1]["train"] = [plant.dosed("caustic", "sodium_hydroxide", 10, "mg/L")]
    found = amounts(made(plant.read(raw)), "sodium", "dose")
    assert list(found.values()) == pytest.approx([0.25 * 10 * 22.9898 / 39.997], rel=1e-4)


def test_a_dose_in_a_side_stream_counts_by_the_fraction(plant):
    """Half the flow with 20 mg/L of carbon dioxide: 10 mg/L of it, 2.73 as carbon."""
    side = {"id": "side", "step": "side_stream", "fraction": 50, "train": []}
    side["train"] = [plant.dosed("gas", "carbon_dioxide", 20, "mg/L")]
    found = amounts(made(plant({"well": 100}, [side])), "dic", "dose")
    assert list(found.values()) == pytest.approx([10 * 12.011 / 44.009], rel=1e-4)


def test_concentration_multiplies_what_came_before_it(plant):
    """At three cycles a litre holds three litres' worth of source, and a dose behind it counts once."""
    circuit = {"id": "circuit", "step": "concentrate", "cycles": 3}
    acid = plant.dosed("acid", "hydrochloric_acid", 36.46, "mg/L")
    found = amounts(made(plant({"well": 100}, [circuit, acid])), "chloride")
    assert found["Well, 100 % of the blend"] == pytest.approx(3 * 38)
    assert found["Hydrochloric acid, 36.46 mg/L"] == pytest.approx(35.45, rel=1e-3)


def test_coagulant_takes_alkalinity_as_its_hydroxide_forms(plant):
    """Alum takes none, its floc 0.505 mg/L as CaCO3 a mg, less what stays dissolved; Davis 2010, eq. 6-8."""
    scenario = plant({"well": 100}, [plant.dosed("alum", "aluminium_sulfate", 30, "mg/L")])
    outcome = evaluate(scenario)
    book = ledger(scenario, outcome)
    taken = amounts(book, "alkalinity", "solid")
    dissolved = float(outcome.readout("dissolved_aluminium"))
    assert list(taken.values()) == pytest.approx([-30 * 0.505 + dissolved * 5.565], abs=0.02)
    assert "dose" not in {line.kind for line in book.lines if line.amounts[book.column("alkalinity")]}


@pytest.mark.parametrize(
    ("name", "solid", "key", "mass"),
    [
        ("quartz", "calcite", "calcium", 100.086 / 40.078),
        ("moss", "aluminium_hydroxide", "aluminium", 78.003 / 26.982),
    ],
)
def test_solids_of_the_ledger_are_the_solids_of_the_plant(name, solid, key, mass):
    """Calcium or aluminium taken, times the mass of the solid per metal, is the dry solid of the stage."""
    scenario = open_scenario(shipped()[name])
    outcome = evaluate(scenario)
    taken = -sum(amounts(ledger(scenario, outcome), key, "solid").values())
    assert taken * mass == pytest.approx(float(outcome.stage().solids[solid]), rel=1e-4)


def test_a_limestone_bed_gives_two_equivalents_with_each_calcium(plant):
    """Calcium, carbon and alkalinity rise together: as CaCO3 by the same amount."""
    book = made(plant({"permeate": 100}, [{"id": "bed", "step": "limestone", "approach": 90}]))
    (calcium,) = amounts(book, "calcium", "solid").values()
    (alkalinity,) = amounts(book, "alkalinity", "solid").values()
    assert calcium * 100.086 / 40.078 == pytest.approx(alkalinity, rel=1e-4)
    assert calcium > 0


def test_air_takes_carbon_and_nothing_else(plant):
    """Stripping lowers the DIC by the carbon dioxide that leaves; alkalinity has no such line."""
    scenario = plant({"well": 100}, [{"id": "tower", "step": "air", "approach": 80}])
    outcome = evaluate(scenario)
    book = ledger(scenario, outcome)
    ((text, lost),) = amounts(book, "dic", "gas").items()
    assert "lost to the air" in text
    change = float(outcome.readout("dic") - outcome.readout("dic", "well"))
    assert lost == pytest.approx(change, rel=1e-9)
    assert not amounts(book, "alkalinity", "gas")


def test_chlorine_and_ammonia_are_one_line_where_they_meet(plant):
    """2 mg/L of chlorine into 1 mg/L of ammonia nitrogen: it is bound, alkalinity falls by 1 eq/mol."""
    raw = plant.dict({"well": 100}, [plant.dosed("hypo", "sodium_hypochlorite", 2, "mg/L as Cl2")])
    raw["waters"][0]["analyses"]["winter"]["ammonia"] = {"value": 1, "unit": "mg/L as N"}
    book = made(plant.read(raw))
    assert list(amounts(book, "free_chlorine", "reaction").values()) == pytest.approx([-2], rel=1e-6)
    assert list(amounts(book, "monochloramine", "reaction").values()) == pytest.approx([2], rel=1e-6)
    assert list(amounts(book, "alkalinity", "reaction").values()) == pytest.approx(
        [-2 * 50.04 / 70.9], rel=1e-3
    )
    assert list(amounts(book, "ammonia", "reaction").values()) == pytest.approx(
        [-2 * 14.007 / 70.9], rel=1e-3
    )


def test_waters_that_react_in_the_blend_have_a_line_there():
    """Harbor: free chlorine of the wells meets the chloramine of the import."""
    scenario = open_scenario(shipped()["harbor"])
    book = made(scenario)
    (line,) = [line for line in book.lines if line.kind == "reaction"]
    assert (line.stage, line.place) == ("blend", "Blend")
    assert line.amounts[book.column("free_chlorine")] < 0


def test_a_line_of_sums_shows_what_reaches_the_blend(plant):
    """After its own train a water has a subtotal; it does not count twice."""
    raw = plant.dict({"river": 60, "well": 40})
    raw["waters"][0]["train"] = [plant.dosed("caustic", "sodium_hydroxide", 4, "mg/L")]
    book = made(plant.read(raw))
    sums = [line.text for line in book.lines if line.kind == SUM]
    assert sums == ["River as it reaches the blend", "Blend"]


def test_a_product_setting_turned_by_a_dial_is_what_counts(plant):
    """Polyaluminium chloride of 20 % basicity brings 2.4 chloride to an aluminium, not the 1.5 of 50 %."""
    dose = plant.dosed("coagulant", "polyaluminium_chloride", 1, "mg/L as Al")
    book = made(plant({"well": 100}, [dose]), **{"train.coagulant.basicity": 20.0})
    assert book.closed
    assert list(amounts(book, "chloride", "dose").values()) == pytest.approx([2.4 * 35.45 / 26.98], rel=1e-3)


def test_a_water_or_step_out_of_service_has_no_line(plant):
    """What does not run is not in the books."""
    dose = plant.dosed("caustic", "sodium_hydroxide", 4, "mg/L", on=False)
    raw = plant.dict({"river": 60, "well": 40}, [dose])
    raw["waters"][1]["on"] = False
    book = made(plant.read(raw))
    assert {line.stage for line in book.lines} == {"river", "blend"}


def test_own_acids_and_hardness_are_columns(plant):
    """A user's acid in mg/L under its name; hardness as CaCO3 behind the two metals."""
    acids = [{"id": "humate", "name": "Humic acid", "molar_mass": 200, "pka": [4.5]}]
    raw = plant.dict({"well": 100}, acids=acids)
    raw["waters"][0]["analyses"]["winter"]["humate"] = {"value": 3, "unit": "mg/L"}
    book = made(plant.read(raw))
    columns = {column.key: (column.label, column.unit) for column in book.columns}
    assert columns["humate"] == ("Humic acid", "mg/L")
    assert book.finished[book.column("humate")] == pytest.approx(3)
    assert columns["hardness"] == ("Total hardness", "mg/L as CaCO3")


# ---- loads, plain data, refusals ---------------------------------------------------------------------------


def test_loads_are_amounts_times_flow(plant):
    """24 ML/d with 100 mg/L of calcium chloride: 2400 kg a day."""
    scenario = plant({"well": 100}, [plant.dosed("salt", "calcium_chloride", 100, "mg/L")])
    book = made(scenario)
    (line,) = [line for line in book.lines if line.kind == "dose"]
    loads = book.loads(line.amounts)
    both = loads[book.column("calcium")] + loads[book.column("chloride")]
    assert both == pytest.approx(2400, rel=1e-3)


def test_plain_data_have_the_same_figures(plant):
    """Amounts by key, kg a day only where there is a flow."""
    book = made(plant({"well": 100}))
    data = book.to_dict()
    assert data["closed"] is True
    assert data["finished"]["calcium"] == pytest.approx(116)
    assert data["lines"][0]["kg_per_day"]["calcium"] == pytest.approx(116 * 24)
    without = made(plant({"well": 100}, flow=None)).to_dict()
    assert without["lines"][0]["kg_per_day"] is None
    assert [row[1] for row in book.table()[-3:]] == ["Total of the lines", "Finished water", "Residual"]


def test_a_ledger_is_of_one_water_with_an_answer(plant):
    """A sweep and a plant without an answer have none."""
    scenario = plant({"well": 100}, [plant.dosed("alum", "aluminium_sulfate", 30, "mg/L")])
    with pytest.raises(ScenarioError, match="a ledger is of one water"):
        ledger(scenario, evaluate(scenario, {"train.alum.dose": np.array([1.0, 2.0])}))
