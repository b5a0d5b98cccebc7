"""The example scenarios that come with the program."""

from pathlib import Path

_FOLDERS = ("shipped", "../scenarios")  # inside an installed package; beside it in a source tree

DEFAULT = "amber"


def shipped() -> dict[str, Path]:
    """Path of each shipped scenario by name, the default one first."""
    package = Path(__file__).resolve().parents[1]
    folder = next((folder for name in _FOLDERS if (folder := package / name).is_dir()), package)
    paths = {path.stem: path.resolve() for path in folder.glob("*.json")}
    return {name: paths[name] for name in sorted(paths, key=lambda name: (name != DEFAULT, name))}


def default_scenario_path() -> Path:
    """The scenario that opens when none is asked for. Raises KeyError where none is shipped."""
    return shipped()[DEFAULT]
