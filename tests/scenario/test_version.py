"""Results say which calculation they are from."""

import re

from explorer import __version__
from explorer.scenario import version


def test_the_method_names_the_version_and_marks_the_constants():
    """Both are short enough to be read aloud."""
    assert re.fullmatch(rf"Blendwright {re.escape(__version__)}, constants [0-9a-f]{{8}}", version.method())


def test_the_mark_changes_with_any_constant(monkeypatch, tmp_path):
    """One figure in one table is enough."""
    for name in version.TABLES:
        (tmp_path / name).write_bytes(version.files("explorer.chemistry").joinpath(name).read_bytes())
    usual = version.constants_mark()
    monkeypatch.setattr(version, "files", lambda package: tmp_path)
    assert version.constants_mark.__wrapped__() == usual
    table = tmp_path / "solids.tsv"
    table.write_bytes(table.read_bytes().replace(b"-8.48", b"-8.47", 1))
    assert version.constants_mark.__wrapped__() != usual
