"""The settings on an opened step card: made from what each kind of step declares."""

import pytest

from explorer.app.rail import Rail
from explorer.app.state import Session
from explorer.scenario.files import open_scenario
from explorer.scenario.model import DoseStep, Step
from explorer.scenario.shipped import shipped
from explorer.treatment.chemicals import dose_moles

ALUM = "train:add:dose:aluminium_sulfate"


def opened(choice: str) -> tuple[Rail, str]:
    """Amber with a step added at the end and its card open, and the key of the card."""
    session = Session(open_scenario(shipped()["amber"]))
    rail = Rail(session)
    session.calculate()
    rail.report(choice)
    return rail, rail.desk.opened


def step_of(rail: Rail, key: str) -> Step:
    return rail.desk.scenario.step(key.rpartition(".")[2])


def moles(rail: Rail, key: str) -> float:
    """What a dose step adds, mol/L."""
    step = step_of(rail, key)
    assert isinstance(step, DoseStep)
    product = rail.desk.scenario.product(step)
    return float(dose_moles(product, step.dose.value, step.dose.unit, step.strength))


@pytest.mark.parametrize(
    ("kind", "fields"),
    [
        ("air", ("approach", "co2_ppm", "altitude")),
        ("limestone", ("approach", "solid")),
        ("settle", ("residual", "full", "solids")),
        ("side_stream", ("fraction",)),
        ("temperature", ("temperature",)),
        ("concentrate", ("cycles",)),
    ],
)
def test_form_follows_the_declaration(kind: str, fields: tuple[str, ...]) -> None:
    """Each declared setting has a field on the card or in the form, named by the declared label."""
    rail, key = opened(f"train:add:{kind}:")
    step = step_of(rail, key)
    names = [str(item.properties.get("aria-label", "")) for item in rail.shown(key).walk()]
    card = rail.shown(key).words()
    for name in fields:
        label = step.fields()[name].label
        assert label in card or any(name.startswith(label) for name in names)


def test_declared_number_is_turned() -> None:
    """A number of the form changes the setting; one out of its declared range is refused."""
    rail, key = opened("train:add:air:")
    rail.report(f"{key}.co2_ppm", "600")
    assert step_of(rail, key).co2_ppm == 600
    rail.report(f"{key}.altitude", "9000")
    assert step_of(rail, key).altitude == 0
    assert "-400 to 5000" in rail.desk.entries.refusal(f"{key}.altitude").replace("−", "-")


def test_one_of_two_settings() -> None:
    """Choosing one of two settings clears the other and starts from the water as it is."""
    rail, key = opened("train:add:air:")
    rail.report(f"{key}:which", "co2")
    step = step_of(rail, key)
    assert step.approach is None
    assert step.co2 > 0
    rail.report(f"{key}:which", "approach")
    assert (step_of(rail, key).co2, step_of(rail, key).approach) == (None, 80)


def test_words_and_ticks() -> None:
    """Choices among declared words, several at once where the declaration says so, and yes or no."""
    rail, key = opened("train:add:limestone:")
    rail.report(f"{key}.solid", "aragonite")
    assert step_of(rail, key).solid == "aragonite"
    rail, key = opened("train:add:settle:")
    rail.report(f"{key}.solids:brucite", True)
    rail.report(f"{key}.full", True)
    assert step_of(rail, key).solids == ["calcite", "brucite"]
    assert step_of(rail, key).full is True


def test_contradicting_settings_are_refused_beside_the_field() -> None:
    """To saturation and a residual exclude each other; the scenario keeps what it had."""
    rail, key = opened("train:add:settle:")
    rail.report(f"{key}.residual", "15")
    rail.report(f"{key}.full", True)
    assert step_of(rail, key).full is False
    assert "residual" in rail.desk.entries.refusal(f"{key}.full")


def test_dose_in_another_unit_is_the_same_dose() -> None:
    """Alum as product, as Al or as the salt: the number changes, what is added does not."""
    rail, key = opened(ALUM)
    before = moles(rail, key)
    units = [child.properties["value"] for child in rail.shown(f"{key}.dose.unit").children]
    assert {"mg/L", "mg/L as Al", "mg/L as product"} <= set(units)
    for unit in units:
        rail.report(f"{key}.dose.unit", unit)
        assert step_of(rail, key).dose.unit == unit
        assert moles(rail, key) == pytest.approx(before, rel=1e-12)
    rail.report(f"{key}.dose.unit", units[0])
    assert step_of(rail, key).dose.value == 1


def test_empty_product_fields_mean_the_usual_product() -> None:
    """Strength is shown as usual until one is entered; emptied, the usual one counts again."""
    rail, key = opened(ALUM)
    usual = rail.desk.scenario.product(step_of(rail, key)).usual_strength
    field = rail.shown(f"{key}.strength").properties
    assert (field["value"], field["placeholder"]) == ("", f"{usual:.7g}")
    rail.report(f"{key}.strength", "40")
    assert step_of(rail, key).strength == 40
    rail.report(f"{key}.strength", "")
    assert step_of(rail, key).strength is None


def test_settings_of_one_product_are_not_offered_for_another() -> None:
    """Basicity belongs to polyaluminium chloride alone."""
    rail, key = opened(ALUM)
    assert f"{key}.basicity" not in rail
    rail, key = opened("train:add:dose:polyaluminium_chloride")
    assert f"{key}.basicity" in rail


def test_another_chemical() -> None:
    """The chemical is exchanged from the searchable list; its hazards follow."""
    rail, key = opened(ALUM)
    rail.report(f"{key}.chemical:sodium_hypochlorite")
    assert step_of(rail, key).chemical == "sodium_hypochlorite"
    assert "chlorine gas" in rail.shown(key).words()


def test_product_use_of_a_dose() -> None:
    """An open dose tells kg a day, t a year and L/h of product: 1 mg/L alum at 20 ML/d is 20 kg/d of salt."""
    rail, key = opened(ALUM)
    step = step_of(rail, key)
    strength = rail.desk.scenario.product(step).usual_strength
    use = 20 / (strength / 100)
    card = rail.shown(key).words()
    assert f"{use:.1f} kg/d of product" in card
    assert f"{use * 0.36525:.1f} t/year" in card
    assert "L/h" in card
