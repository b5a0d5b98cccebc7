"""Steps other than doses, as they stand in a plant."""

import numpy as np
import pytest

from explorer.scenario.evaluate import evaluate

SAME_PH = 1e-9


def side(fraction, *train, name="bypass"):
    return {"id": name, "step": "side_stream", "fraction": fraction, "train": list(train)}


def bed(approach, name="bed"):
    return {"id": name, "step": "limestone", "approach": approach}


def test_a_side_stream_of_the_whole_flow_is_the_plain_train(plant):
    """100 % through the side train equals the same steps in line."""
    steps = [plant.dosed("gas", "carbon_dioxide", 30, "mg/L"), bed(90)]
    inline = evaluate(plant({"permeate": 100}, steps))
    aside = evaluate(plant({"permeate": 100}, [side(100, *steps)]))
    for key in ("ph", "calcium", "ccpp"):
        assert aside.readout(key) == pytest.approx(float(inline.readout(key)), abs=1e-8)


def test_a_side_stream_of_no_flow_does_nothing(plant):
    """0 % leaves the water as it is."""
    outcome = evaluate(plant({"permeate": 100}, [side(0, plant.dosed("gas", "carbon_dioxide", 30, "mg/L"))]))
    assert outcome.readout("ph") == pytest.approx(5.9, abs=1e-8)


def test_part_flow_treatment_mixes_back_by_its_fraction(plant):
    """Calcium of the joined water is the mean of treated and untreated by the fraction."""
    train = [side(50, plant.dosed("gas", "carbon_dioxide", 60, "mg/L"), bed(90))]
    outcome = evaluate(plant({"permeate": 100}, train), {"train.bypass.fraction": np.array([20.0, 50.0])})
    inside, before = outcome.readout("calcium", "bed"), 0.6
    part = np.array([0.2, 0.5])
    assert outcome.readout("calcium") == pytest.approx(part * inside + (1 - part) * before)
    assert [stage.id for stage in outcome.stages] == ["permeate", "blend", "gas", "bed", "bypass"]
    assert outcome.stage("bed").flow == pytest.approx(part * 1000)


def test_dials_inside_side_streams_can_be_turned(plant):
    """The approach of a contactor in a side stream has an address of its own."""
    train = [side(50, plant.dosed("gas", "carbon_dioxide", 60, "mg/L"), bed(90))]
    outcome = evaluate(
        plant({"permeate": 100}, train), {"train.bypass.train.bed.approach": np.array([80.0, 90, 95])}
    )
    assert (np.diff(outcome.readout("calcium")) > 0).all()


def test_limestone_brings_a_water_to_saturation(plant):
    """A full approach ends at CCPP 0; half of it dissolves half."""
    outcome = evaluate(plant({"permeate": 100}, [bed(100)]), {"train.bed.approach": np.array([50.0, 100.0])})
    assert outcome.readout("ccpp")[1] == pytest.approx(0, abs=1e-4)
    dissolved = outcome.readout("calcium") - 0.6
    assert dissolved[0] == pytest.approx(dissolved[1] / 2, rel=1e-6)


def test_stripping_to_a_stated_content(plant):
    """Air contact to 2 mg/L of CO2 leaves 2 mg/L and the alkalinity alone."""
    outcome = evaluate(plant({"well": 100}, [{"id": "tower", "step": "air", "co2": 2.0}]))
    assert outcome.readout("co2") == pytest.approx(2.0, abs=1e-3)
    assert outcome.readout("alkalinity") == pytest.approx(272)
    assert outcome.readout("ph") > 8


def test_settling_to_a_residual(plant):
    """Softened water leaves with the stated supersaturation, and the solids are counted."""
    train = [
        plant.dosed("lime", "calcium_hydroxide", 150, "mg/L"),
        {"id": "clarifier", "step": "settle", "residual": 15},
    ]
    outcome = evaluate(plant({"well": 100}, train))
    assert outcome.readout("ccpp") == pytest.approx(15, abs=1e-3)
    lost = outcome.readout("calcium", "lime") - outcome.readout("calcium")
    assert outcome.readout("solids") == pytest.approx(float(lost) * 100.086 / 40.078, rel=1e-3)


def test_warming_the_finished_water(plant):
    """A temperature step changes nothing but the temperature, and with it the CCPP."""
    train = [{"id": "heater", "step": "temperature", "temperature": {"value": 140, "unit": "°F"}}]
    outcome = evaluate(plant({"well": 100}, train))
    assert outcome.readout("temperature") == pytest.approx(60)
    assert outcome.readout("alkalinity") == pytest.approx(272)
    assert outcome.readout("ccpp") > outcome.readout("ccpp", "blend") + 20


def test_concentration_multiplies_contents_and_costs(plant):
    """Three cycles treble the chloride, leave a third of the flow, and treble the cost per ML."""
    train = [
        plant.dosed("acid", "sulfuric_acid", 20, "mg/L", price=0.2),
        {"id": "tower", "step": "concentrate", "cycles": 3},
    ]
    outcome = evaluate(plant({"transfer": 100}, train))
    assert outcome.readout("chloride") == pytest.approx(288)
    assert float(outcome.stage("tower").flow) == pytest.approx(1000 / 3)
    assert outcome.readout("cost") == pytest.approx(3 * float(outcome.readout("cost", "acid")))
