"""A scenario inside an HTML page, so that a report can be opened like the file it was made from.

The JSON stands in a data block, which a browser neither runs nor shows. In it every sign that HTML gives a
meaning to is written as its JSON escape: no text of a scenario can close the block, and the JSON still means
the same.
"""

import re

from explorer.scenario.errors import ScenarioError

BLOCK = "blendwright-scenario"
"""Id of the element that holds the JSON."""

_OPENING = re.compile(r"<script\b[^<>]*+>")
_CLOSING = "</script"
_ESCAPES = {ord(sign): f"\\u{ord(sign):04x}" for sign in "<>&"}


def embedded(text: str) -> str:
    """The element that holds the ``text`` of a scenario file."""
    safe = text.strip().translate(_ESCAPES)
    return f'<script type="application/json" id="{BLOCK}">\n{safe}\n{_CLOSING}>'


def is_page(text: str) -> bool:
    """Whether a text is a page instead of a scenario file, whose first sign is a brace."""
    return text.lstrip().startswith("<")


def read_embedded(html: str) -> str:
    """Text of the scenario inside a page. Raises ScenarioError for a page without one."""
    scripts = _OPENING.finditer(html)
    opening = next((tag for tag in scripts if f'id="{BLOCK}"' in tag[0]), None)
    end = -1 if opening is None else html.find(_CLOSING, opening.end())
    if end < 0:
        message = (
            "the file is a page without a scenario; allowed a scenario file or a report with its scenario"
        )
        raise ScenarioError("", message)
    return html[opening.end() : end].strip()
