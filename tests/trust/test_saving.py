"""Saving: whatever happens meanwhile, the file is the old one or the new one; what fails is said in words."""

import os
import random
import resource
import signal
import subprocess
import sys
import time
from pathlib import Path

import pytest

from explorer.scenario.files import dumps, open_scenario, save_scenario
from explorer.scenario.shipped import shipped
from tests.serving import ROOT

KILLS = 25
SEED = 11

# two scenarios of very different length by turns, as quickly as it goes
SAVE_FOREVER = """
import sys
from explorer.scenario.files import open_scenario, save_scenario
one, other, target = map(str, sys.argv[1:])
scenarios = [open_scenario(one), open_scenario(other)]
print("ready", flush=True)
while True:
    for scenario in scenarios:
        save_scenario(scenario, target)
"""

SAVE_LITTLE = """
import resource, signal, sys
from explorer.scenario.files import ScenarioError, open_scenario, save_scenario
scenario = open_scenario(sys.argv[1])
signal.signal(signal.SIGXFSZ, signal.SIG_IGN)
resource.setrlimit(resource.RLIMIT_FSIZE, (1000, 1000))
try:
    save_scenario(scenario, sys.argv[2])
except ScenarioError as error:
    print(error)
"""


@pytest.fixture
def pair(tmp_path: Path) -> tuple[Path, Path]:
    """Two scenario files, a short one and a long one, as the program writes them."""
    paths = (tmp_path / "short.json", tmp_path / "long.json")
    scenarios = [open_scenario(path) for path in shipped().values()]
    scenarios.sort(key=lambda scenario: len(dumps(scenario)))
    for scenario, path in zip((scenarios[0], scenarios[-1]), paths, strict=True):
        save_scenario(scenario, path)
    return paths


def blendwright(*arguments: object, **settings: object) -> subprocess.CompletedProcess[str]:
    command = [sys.executable, "-m", "explorer", *map(str, arguments)]
    return subprocess.run(command, cwd=ROOT, capture_output=True, text=True, timeout=120, **settings)


def test_a_process_killed_while_it_saves_leaves_the_old_file_or_the_new_one(
    pair: tuple[Path, Path], tmp_path: Path
) -> None:
    """Killed at many random moments of saving after saving, the file is each time one of the two, whole."""
    folder = tmp_path / "plant"
    folder.mkdir()
    target, wholes = folder / "plan.json", {path.read_bytes() for path in pair}
    target.write_bytes(pair[0].read_bytes())
    chance, seen = random.Random(SEED), set()
    for _ in range(KILLS):
        command = [sys.executable, "-c", SAVE_FOREVER, *map(str, pair), str(target)]
        process = subprocess.Popen(command, cwd=ROOT, stdout=subprocess.PIPE)
        try:
            process.stdout.readline()
            time.sleep(chance.uniform(0, 0.3))
        finally:
            process.kill()
            process.communicate()
        found = target.read_bytes()
        assert found in wholes
        assert open_scenario(target).title
        seen.add(found)
    assert seen == wholes
    # what a kill leaves beside the file is hidden, bears no name of a scenario file, and does no harm
    assert all(path == target or path.name.startswith(".") for path in folder.iterdir())


def test_no_room_for_the_new_file_leaves_the_old_one(pair: tuple[Path, Path], tmp_path: Path) -> None:
    """The system ends the writing in the middle; one sentence, and no remains."""
    folder = tmp_path / "plant"
    folder.mkdir()
    target = folder / "plan.json"
    target.write_bytes(pair[0].read_bytes())
    command = [sys.executable, "-c", SAVE_LITTLE, str(pair[1]), str(target)]
    done = subprocess.run(command, cwd=ROOT, capture_output=True, text=True, timeout=120)
    assert (done.stdout, done.stderr) == (
        f"{target}: cannot be saved: it would be too large for the disk\n",
        "",
    )
    assert target.read_bytes() == pair[0].read_bytes()
    assert list(folder.iterdir()) == [target]


def little_room() -> None:
    signal.signal(signal.SIGXFSZ, signal.SIG_IGN)
    resource.setrlimit(resource.RLIMIT_FSIZE, (1000, 1000))


@pytest.mark.parametrize(
    "command",
    [("report", "{file}", "-o", "{out}"), ("sweep", "{file}", "--csv", "{out}")],
    ids=lambda c: c[0],
)
def test_commands_that_write_keep_the_old_file_when_there_is_no_room(
    command: tuple[str, ...], pair: tuple[Path, Path], tmp_path: Path
) -> None:
    """One sentence on stderr, exit status 2, and the file of last week is still there."""
    out = tmp_path / "out.file"
    out.write_text("of last week")
    arguments = [part.format(file=pair[1], out=out) for part in command]
    done = blendwright(*arguments, preexec_fn=little_room)
    assert (done.returncode, done.stderr) == (
        2,
        f"{out}: cannot be saved: it would be too large for the disk\n",
    )
    assert out.read_text() == "of last week"
    assert sorted(tmp_path.iterdir()) == sorted([*pair, out])


@pytest.mark.skipif(not Path("/dev/full").exists(), reason="only where the system has a device that is full")
def test_a_full_disk_behind_a_pipe_is_told_in_a_sentence(pair: tuple[Path, Path]) -> None:
    """Also where the figures go to the screen and the screen is a file on a full disk."""
    with open("/dev/full", "w") as full:
        command = [sys.executable, "-m", "explorer", "solve", str(pair[0])]
        done = subprocess.run(command, cwd=ROOT, stdout=full, stderr=subprocess.PIPE, text=True, timeout=120)
    assert (done.returncode, done.stderr) == (2, "the system: no space left on device\n")


def test_a_folder_that_takes_no_file_is_told_in_a_sentence(pair: tuple[Path, Path], tmp_path: Path) -> None:
    """A folder of the system's own, in which nobody can make a file; nothing is written anywhere."""
    for out in ("/proc/plan.csv", pair[0] / "plan.csv"):
        done = blendwright("sweep", pair[0], "--csv", out)
        assert done.returncode == 2
        assert done.stderr.startswith(f"{out}: cannot be saved: ") and done.stderr.count("\n") == 1
    assert sorted(tmp_path.iterdir()) == sorted(pair)


@pytest.mark.skipif(os.geteuid() == 0, reason="permissions do not bind the administrator")
def test_a_folder_without_permission_is_told_in_a_sentence(pair: tuple[Path, Path], tmp_path: Path) -> None:
    """The words are those of permission, and the old file stays."""
    folder = tmp_path / "plant"
    folder.mkdir()
    (folder / "plan.csv").write_text("of last week")
    folder.chmod(0o500)
    try:
        done = blendwright("sweep", pair[0], "--csv", folder / "plan.csv")
    finally:
        folder.chmod(0o700)
    assert (done.returncode, done.stderr) == (
        2, f"{folder / 'plan.html'}: cannot be saved: it is not permitted\n"
    )  # fmt: skip
    assert (folder / "plan.csv").read_text() == "of last week"
