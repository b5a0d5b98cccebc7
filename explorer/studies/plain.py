"""Numbers as plain data."""

import math
from typing import Any


def known(value: Any) -> float | None:
    """A number as a float, None where there is no finite one."""
    value = float(value)
    return value if math.isfinite(value) else None
