"""A scenario's own chemicals and weak acids: what uses them, and taking them out again."""

from collections.abc import Iterator

from explorer.scenario.chemicals import Acid, OwnChemical
from explorer.scenario.dials import step_name
from explorer.scenario.errors import ScenarioError
from explorer.scenario.model import Scenario
from explorer.scenario.steps import DoseStep

Own = Acid | OwnChemical


def own_parts(scenario: Scenario) -> list[Own]:
    """Chemicals, then acids."""
    return [*scenario.chemicals, *scenario.acids]


def uses(scenario: Scenario, part: Own) -> Iterator[str]:
    """In words, where a chemical or an acid is used."""
    if isinstance(part, OwnChemical):
        for _, step in scenario.steps():
            if isinstance(step, DoseStep) and step.chemical == part.id:
                yield f"the step {step_name(scenario, step)}"
        return
    for water in scenario.waters:
        seasons = [season for season, analysis in water.analyses.items() if part.id in analysis.entries]
        if seasons:
            yield f"the analysis of {water.title}, {', '.join(seasons)}"
    for chemical in scenario.chemicals:
        if part.id in (chemical.adds or {}):
            yield f"the chemical {chemical.name or chemical.id}"


def remove_own(scenario: Scenario, part_id: str) -> None:
    """Take out a chemical or an acid. Raises ScenarioError where it is unknown or something uses it."""
    for place in ("chemicals", "acids"):
        parts = getattr(scenario, place)
        for part in parts:
            if part.id == part_id:
                user = next(uses(scenario, part), None)
                if user is not None:
                    name = part.name or part.id
                    raise ScenarioError(place, f"{name} is used in {user}; allowed once nothing uses it")
                setattr(scenario, place, [other for other in parts if other is not part])
                return
    raise ScenarioError("", f"{part_id} is neither a chemical nor an acid of this scenario")
