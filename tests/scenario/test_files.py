"""Scenario files: opening, saving, and what stays as it was."""

import errno
import json
import os
import stat
from pathlib import Path

import pytest

from explorer.scenario import files
from explorer.scenario.errors import ScenarioError
from explorer.scenario.files import dumps, open_scenario, read_scenario, save_scenario
from explorer.scenario.model import Quantity, Scenario, Target
from explorer.scenario.shipped import default_scenario_path, shipped

SAVED = Path(__file__).parent / "saved"
OLD_FILES = sorted(SAVED.glob("*.json"))
EVERY_FILE = [*OLD_FILES, *shipped().values()]


def written(raw: object) -> str:
    """JSON text in which order and the kind of number count."""
    return json.dumps(raw, ensure_ascii=False)


@pytest.fixture
def scenario() -> Scenario:
    """The scenario that uses everything the format has."""
    return open_scenario(SAVED / "version_1.json")


@pytest.mark.parametrize("path", EVERY_FILE, ids=lambda path: path.stem)
def test_a_file_opened_and_saved_again_is_identical(path: Path, tmp_path: Path) -> None:
    """Same bytes: order of keys, explicit nulls and defaults, 60 and 60.0, units as entered."""
    copy = tmp_path / "copy.json"
    save_scenario(open_scenario(path), copy)
    assert copy.read_bytes() == path.read_bytes()


@pytest.mark.parametrize("path", EVERY_FILE, ids=lambda path: path.stem)
def test_the_layout_of_a_file_does_not_matter_to_what_is_kept(path: Path) -> None:
    """A file on one line says the same, and is laid out when it is saved."""
    raw = json.loads(path.read_text(encoding="utf-8"))
    scenario = read_scenario(written(raw))
    assert written(scenario.to_dict()) == written(raw)
    assert dumps(scenario) == path.read_text(encoding="utf-8")


def test_a_text_is_laid_out_to_be_read(scenario: Scenario) -> None:
    """Two spaces a level, values with their unit on one line, characters as they are, a last line end."""
    text = dumps(scenario)
    assert '\n          "temperature": {"value": 39.2, "unit": "°F"},\n' in text
    assert '"seasons": ["winter", "Spätsommer"]' in text
    assert text.endswith("}\n")
    assert max(len(line) for line in text.splitlines() if '"note"' not in line) <= 110


def test_a_change_is_written_and_the_rest_stays(scenario: Scenario) -> None:
    """One changed value is one changed line."""
    before = dumps(scenario).splitlines()
    scenario.step("caustic").hold.value = 8.2
    after = dumps(scenario).splitlines()
    changed = [(one, other) for one, other in zip(before, after, strict=True) if one != other]
    assert len(changed) == 1
    assert '"value": 8.2' in changed[0][1]


def test_parts_that_were_not_written_out_appear_once_they_say_something(scenario: Scenario) -> None:
    """A default is not written of its own accord; another value is."""
    well = scenario.water("well")
    assert "on" not in well.to_dict()
    well.on = False
    assert well.to_dict()["on"] is False


def test_a_scenario_made_by_the_program_says_only_what_is_needed() -> None:
    """No nulls and no defaults, in the order of the format."""
    flow = Quantity(20, "ML/d")
    made = Scenario(
        title="New", seasons=["winter"], season="winter", flow=flow, targets=[Target(readout="ph", low=7)]
    )
    assert written(made.to_dict()) == written(
        {
            "format": "blendwright-scenario",
            "version": 1,
            "title": "New",
            "seasons": ["winter"],
            "season": "winter",
            "flow": {"value": 20, "unit": "ML/d"},
            "waters": [],
            "targets": [{"readout": "ph", "low": 7}],
        }
    )


def test_saving_replaces_a_file_as_a_whole_and_keeps_its_permissions(
    scenario: Scenario, tmp_path: Path
) -> None:
    """The old content is gone, nothing else lies in the folder, the mode is that of the old file."""
    path = tmp_path / "plan.json"
    path.write_text("old " * 100_000)
    path.chmod(0o640)
    save_scenario(scenario, path)
    assert open_scenario(path).same_as(scenario)
    assert stat.S_IMODE(path.stat().st_mode) == 0o640
    assert list(tmp_path.iterdir()) == [path]


def test_saving_through_a_link_leaves_the_link(scenario: Scenario, tmp_path: Path) -> None:
    """The file behind the link is replaced."""
    path, link = tmp_path / "plan.json", tmp_path / "today.json"
    path.write_text("old")
    link.symlink_to(path)
    save_scenario(scenario, link)
    assert link.is_symlink()
    assert path.read_text(encoding="utf-8") == dumps(scenario)


def test_a_scenario_that_could_not_be_opened_again_is_not_saved(scenario: Scenario, tmp_path: Path) -> None:
    """The sentence is that of reading; the old file stays."""
    path = tmp_path / "plan.json"
    path.write_text("old")
    scenario.water("well").share = 90
    with pytest.raises(ScenarioError, match=r"^waters: the shares add to 152\.5 %; allowed 100 %$"):
        save_scenario(scenario, path)
    assert path.read_text() == "old"


@pytest.mark.parametrize(
    ("code", "words"), [(errno.ENOSPC, "the disk is full"), (errno.EROFS, "the disk is read-only")]
)
def test_a_failed_save_leaves_the_old_file_and_nothing_else(
    scenario: Scenario, tmp_path: Path, monkeypatch: pytest.MonkeyPatch, code: int, words: str
) -> None:
    """The system's refusal is one sentence with the file's path."""
    path = tmp_path / "plan.json"
    path.write_text("old")

    def refuse(descriptor: int) -> None:
        raise OSError(code, os.strerror(code))

    monkeypatch.setattr(files.os, "fsync", refuse)
    with pytest.raises(ScenarioError) as refusal:
        save_scenario(scenario, path)
    assert str(refusal.value) == f"{path}: cannot be saved: {words}"
    assert path.read_text() == "old"
    assert list(tmp_path.iterdir()) == [path]


def test_saving_where_there_is_no_folder_is_refused(scenario: Scenario, tmp_path: Path) -> None:
    """No folder is made up."""
    with pytest.raises(ScenarioError, match="cannot be saved: there is no such file or folder"):
        save_scenario(scenario, tmp_path / "nowhere" / "plan.json")


def test_a_folder_is_neither_opened_nor_replaced(scenario: Scenario, tmp_path: Path) -> None:
    """A folder is not a scenario file."""
    with pytest.raises(ScenarioError, match="cannot be saved: it is a folder"):
        save_scenario(scenario, tmp_path)
    with pytest.raises(ScenarioError, match="it is not a file; allowed a scenario file"):
        open_scenario(tmp_path)


def test_a_device_is_neither_opened_nor_replaced(scenario: Scenario) -> None:
    """Reading the null device would find an empty file, replacing it would do harm."""
    with pytest.raises(ScenarioError, match="cannot be opened: it is not a file"):
        open_scenario(os.devnull)
    with pytest.raises(ScenarioError, match="cannot be saved: it is not permitted"):
        save_scenario(scenario, os.devnull)


@pytest.mark.parametrize(
    ("path", "told"),
    [
        ("nowhere.json", "nowhere.json: cannot be opened: there is no such file or folder"),
        ("", "the file: cannot be opened: there is no such file or folder"),
        ("a\0b.json", "a\ufffdb.json: cannot be opened: this is not a path"),
        ("x" * 300, "x" * 300 + ": cannot be opened: the name is too long"),
    ],
)
def test_a_path_without_a_file_is_refused_in_one_sentence(
    path: str, told: str, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """No traceback, and no control character of the path reaches the screen."""
    monkeypatch.chdir(tmp_path)
    with pytest.raises(ScenarioError) as refusal:
        open_scenario(path)
    assert str(refusal.value) == told


def test_a_large_file_is_refused_before_it_is_read(tmp_path: Path) -> None:
    """A file beyond the limit is not taken into memory."""
    path = tmp_path / "large.json"
    with path.open("wb") as file:
        file.truncate(10 * files.LARGEST_FILE)
    with pytest.raises(ScenarioError, match="the file is too large; allowed 5 MB"):
        open_scenario(path)


def test_the_default_scenario_is_shipped() -> None:
    """It is the first of the shipped ones."""
    assert default_scenario_path() == next(iter(shipped().values()))
