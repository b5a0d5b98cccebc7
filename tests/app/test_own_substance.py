"""Chemicals and weak acids of the user's own, defined on the rail, without a browser."""

import pytest

from explorer.app.files import Shelf
from explorer.app.main import build
from explorer.app.own_substance import read_part, written_part
from explorer.app.shell import Shell
from explorer.scenario import editing
from explorer.scenario.errors import ScenarioError
from explorer.scenario.files import dumps, read_scenario
from explorer.scenario.model import Acid, OwnChemical
from explorer.scenario.own_parts import remove_own
from explorer.scenario.shipped import shipped


@pytest.fixture
def shell() -> Shell:
    """The page of the shipped river and wellfield."""
    return build(shipped()["amber"], shelf=Shelf())


def define(shell: Shell, kind: str, **entered: str) -> None:
    shell.rail.report(f"train:add:{kind}:")
    for name, text in entered.items():
        shell.rail.report(f"own::{name}", text)
    shell.rail.report("own::take")


def test_own_chemical_is_defined_and_dosed_in_one_step(shell: Shell) -> None:
    """What it adds counts; the file holds it; one undo takes back both."""
    before = dumps(shell.session.scenario)
    define(
        shell,
        "own-chemical",
        name="Works liquor",
        formula="NaOH",
        adds="sodium 1, alkalinity 1",
        strength="20",
    )
    own = shell.session.scenario.chemicals[0]
    assert own.adds == {"sodium": 1, "alkalinity": 1} and own.strength == 20
    step = shell.session.scenario.train[-1]
    assert step.chemical == own.id and shell.rail.desk.opened == f"train.{step.id}"
    assert read_scenario(dumps(shell.session.scenario)).chemicals[0].name == "Works liquor"
    assert "own:" not in shell.rail
    shell.session.undo()
    assert dumps(shell.session.scenario) == before


def test_chemical_like_one_of_the_catalogue(shell: Shell) -> None:
    """What is left out comes from there."""
    define(shell, "own-chemical", name="Caustic, site grade", like="sodium_hydroxide", strength="32")
    own = shell.session.scenario.chemicals[0]
    assert shell.session.scenario.known_chemicals()[own.id].usual_strength == 32


def test_own_acid_can_be_listed_in_analyses(shell: Shell) -> None:
    """With its dissociation constants."""
    define(shell, "own-acid", name="Lactic acid", molar_mass="90,08", pka="3.86")
    acid = shell.session.scenario.acids[0]
    assert acid.pka == [3.86] and acid.molar_mass == 90.08
    shell.rail.report("waters.river:open")
    shell.rail.report(f"waters.river.analysis:add:{acid.id}")
    assert acid.id in shell.session.scenario.waters[0].analyses["winter"].entries


@pytest.mark.parametrize(
    ("entered", "field", "words"),
    [
        ({"name": "X", "formula": "NaOH", "adds": "sodium"}, "adds", "allowed like"),
        ({"name": "X", "like": "sodium_hydroxide", "strength": "much"}, "strength", "is not a number"),
        ({"name": "X", "like": "sodium_hydroxide", "strength": "400"}, "strength", "allowed 0.1 to 100"),
        ({"name": "X", "like": "sodium_hydroxide", "density": "9"}, "density", "allowed 0.5 to 3"),
        ({"name": "X", "formula": "Zz9", "adds": "sodium 1"}, "formula", ""),
    ],
)
def test_refusal_stands_at_its_field_and_nothing_changes(
    shell: Shell, entered: dict[str, str], field: str, words: str
) -> None:
    """What was typed stays in the form."""
    before = dumps(shell.session.scenario)
    define(shell, "own-chemical", **entered)
    where, sentence = shell.rail.desk.defining.refused
    assert where == field and words in sentence and sentence
    assert dumps(shell.session.scenario) == before
    shell.rail.report("own::cancel")
    assert shell.rail.desk.defining is None


def test_own_chemical_is_changed_in_the_form_it_was_defined_in(shell: Shell) -> None:
    """The form comes filled in; steps that dose the chemical stay; one undo takes the change back."""
    adds = "sodium 1, alkalinity 1"
    define(shell, "own-chemical", name="Works liquor", formula="NaOH", adds=adds, strength="20")
    own, before = shell.session.scenario.chemicals[0], dumps(shell.session.scenario)
    assert "used in the step Works liquor" in shell.rail.shown(f"own:{own.id}").words()
    shell.rail.report(f"own:{own.id}:change")
    assert shell.rail.shown("own:own:adds").properties["value"] == adds
    shell.rail.report("own:own:strength", "25")
    shell.rail.report("own:own:take")
    assert shell.session.scenario.chemicals[0].to_dict() == own.to_dict() | {"strength": 25}
    assert shell.session.scenario.train[-1].chemical == own.id
    shell.session.undo()
    assert dumps(shell.session.scenario) == before


def test_an_own_substance_in_use_cannot_be_removed(shell: Shell) -> None:
    """First its step goes, then the chemical."""
    define(shell, "own-chemical", name="Works liquor", like="sodium_hydroxide")
    own, step = shell.session.scenario.chemicals[0], shell.session.scenario.train[-1]
    shell.rail.report(f"own:{own.id}:remove")
    assert shell.session.scenario.chemicals == [own]
    shell.session.edit("Remove", lambda scenario: editing.remove_step(scenario, step.id))
    shell.rail.report(f"own:{own.id}:remove")
    assert shell.session.scenario.chemicals == []
    assert "own" not in shell.rail


def test_an_own_acid_in_an_analysis_cannot_be_removed(shell: Shell) -> None:
    """The refusal names the water and the seasons."""
    define(shell, "own-acid", name="Lactic acid", molar_mass="90.08", pka="3.86")
    (acid,) = shell.session.scenario.acids
    shell.rail.report("waters.river:open")
    shell.rail.report(f"waters.river.analysis:add:{acid.id}")
    with pytest.raises(ScenarioError, match="used in the analysis of Fern River, winter; allowed once"):
        remove_own(shell.session.scenario, acid.id)


def test_a_form_goes_with_its_substance(shell: Shell) -> None:
    """Undoing the definition while it is being changed closes the form."""
    define(shell, "own-chemical", name="Works liquor", like="sodium_hydroxide")
    shell.rail.report(f"own:{shell.session.scenario.chemicals[0].id}:change")
    shell.session.undo()
    assert shell.rail.desk.defining is None


@pytest.mark.parametrize(
    ("kind", "raw"),
    [
        (OwnChemical, {"id": "a", "name": "A", "adds": {"sodium": 1.5, "alkalinity": -2}, "ratio": 3.2}),
        (OwnChemical, {"id": "b", "counted_as": {"CaCO3": 0.5}, "hazards": ["burns skin", "keep dry"]}),
        (Acid, {"id": "c", "pka": [3.1, 4.8], "enthalpy_kj": [4, -2.4], "charge": -1, "molar_mass": 99}),
    ],
)  # fmt: skip
def test_what_the_form_shows_is_read_back_as_it_was(kind: type, raw: dict) -> None:
    """Every kind of field."""
    written = kind.from_dict(raw).to_dict()
    fields = kind.fields()
    read = {name: read_part(fields[name], written_part(fields[name], written[name])) for name in written}
    assert read == raw
