"""Which calculation gave a result, so that whoever repeats it can tell whether it is the same."""

from functools import cache
from hashlib import sha256
from importlib.resources import files

from explorer import __version__

TABLES = ("equilibria.tsv", "solids.tsv")


@cache
def constants_mark() -> str:
    """Eight figures that change with any character of the tables of constants."""
    folder = files("explorer.chemistry")
    content = b"\n".join(folder.joinpath(name).read_bytes() for name in TABLES)
    return sha256(content).hexdigest()[:8]


def method() -> str:
    """Version of the program and mark of its constants, as options and reports carry it."""
    return f"Blendwright {__version__}, constants {constants_mark()}"
