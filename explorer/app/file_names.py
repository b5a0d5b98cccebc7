"""Names of files that are handed to the browser."""

from __future__ import annotations

import re
import unicodedata

LONGEST = 80


def file_name(title: str, ending: str = "json") -> str:
    """A file name from a title: letters, digits and hyphens of any script, never empty. Raised and
    lowered figures stand on the line."""
    words = re.sub(r"[^\w]+", "-", unicodedata.normalize("NFKC", title).lower()).strip("-_")
    return f"{words[:LONGEST].rstrip('-_') or 'scenario'}.{ending}"
