"""Hostile files: whatever a file holds, it is a scenario or it is refused in one clear sentence."""

import tracemalloc

import pytest

from explorer.scenario.errors import ScenarioError
from explorer.scenario.evaluate import evaluate
from explorer.scenario.files import LARGEST_FILE, dumps, read_scenario

from .hostile import KINDS, mutant
from .large import TOO_MUCH, full_plant
from .mutations import NO_ANSWER, REFUSED, TAKEN, Desk, clear_sentence, mutants, sources, tried

COUNT = 500
MOST_MEMORY = 30 * LARGEST_FILE
"""Bytes: what reading may take of memory, whatever the file."""


@pytest.fixture(scope="module")
def tally():
    """500 mutants through ``blendwright check`` and the Open of the page."""
    return tried(mutants(COUNT, first=10_000_000))


def test_every_mutant_is_a_scenario_or_is_refused_in_one_clear_sentence(tally):
    """What is taken is evaluated without a warning and comes back from its file as it was; what is refused
    leaves the page as it was."""
    assert tally.defects == []
    assert sum(sum(found.values()) for found in tally.outcomes.values()) == COUNT


def test_the_mutants_are_of_every_kind_and_many_are_taken(tally):
    """The property above is not met by refusing everything, nor by changes that do no harm."""
    assert tally.outcomes.keys() == KINDS.keys()
    taken, refused = (sum(found[what] for found in tally.outcomes.values()) for what in (TAKEN, REFUSED))
    assert taken > COUNT / 10
    assert refused > COUNT / 2
    assert sum(found[NO_ANSWER] for found in tally.outcomes.values()) > 0


ONCE_WRONG = (
    500_184, 501_033, 503_080, 1_000_965, 1_005_105, 1_008_551, 1_012_925, 1_014_002, 1_014_098,
)  # fmt: skip
"""Seeds that found a fault when the sources were as they were then; the kinds of change stay worth trying."""


def test_changes_that_once_found_a_fault_find_none():
    """A value near zero, a pH of 1e30, a water with no alkalinity, blank keys, keys as long as a sentence."""
    found = sources()
    assert tried(mutant(found, seed) for seed in ONCE_WRONG).defects == []


@pytest.mark.parametrize("name", TOO_MUCH)
def test_too_much_of_anything_is_refused_in_words_and_in_little_memory(name):
    """Size, depth and number of parts have limits, and each says so."""
    make, start = TOO_MUCH[name]
    content = make().encode()
    tracemalloc.start()
    try:
        with pytest.raises(ScenarioError) as refusal:
            read_scenario(content)
        assert tracemalloc.get_traced_memory()[1] < MOST_MEMORY
    finally:
        tracemalloc.stop()
    assert str(refusal.value).startswith(start)
    assert clear_sentence(str(refusal.value)) == ""


def test_a_page_refuses_fifty_megabytes_in_words():
    """The same sentence wherever the file comes from, and nothing else happens."""
    told = Desk().open(b" " * 50_000_000)
    assert told == f"is larger than {LARGEST_FILE // 1_000_000} MB; allowed are scenario files"


def test_the_largest_plant_is_within_every_limit():
    """Fifty waters, twelve seasons, two hundred steps and ten options are read, evaluated and written."""
    scenario = read_scenario(full_plant())
    assert len(scenario.waters) == 50 and len(scenario.seasons) == 12 and len(list(scenario.steps())) == 196
    assert 6 < evaluate(scenario).readout("ph") < 10
    assert read_scenario(dumps(scenario)).to_dict() == scenario.to_dict()
