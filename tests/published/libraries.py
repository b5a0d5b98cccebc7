"""Tables of measurements that the general-purpose library ``chemicals`` carries but has no function for."""

import csv
from pathlib import Path

import chemicals

FOLDER = Path(chemicals.__file__).parent / "Electrolytes"


def library_table(file_name: str, key: str) -> dict[str, dict[str, str]]:
    """Rows by the text in column ``key``; of columns that share a name the first is kept."""
    with (FOLDER / file_name).open(encoding="utf-8", newline="") as file:
        header, *rows = csv.reader(file, delimiter="\t")
    first = {name: header.index(name) for name in header}
    return {row[first[key]]: {name: row[at] for name, at in first.items()} for row in rows}
