"""The share rule: what the other waters do when one share is turned."""

from collections.abc import Mapping

import numpy as np
from numpy.typing import ArrayLike

WHOLE = 100.0
"""Shares are in percent."""

TOLERANCE = 1e-6
"""Percent by which given shares may miss the whole."""


def in_service(shares: Mapping[str, float]) -> dict[str, float]:
    """Shares of the waters in service, scaled to the whole; equal where all are zero."""
    total = sum(shares.values())
    if total <= 0:
        return dict.fromkeys(shares, WHOLE / len(shares))
    return {water: WHOLE * share / total for water, share in shares.items()}


def settle(
    shares: Mapping[str, float], turned: Mapping[str, ArrayLike], balance: str | None = None
) -> tuple[dict[str, np.ndarray], np.ndarray]:
    """Shares [%] of all waters in service when some are turned, and where that is possible.

    ``shares`` add to the whole. The ``balance`` water takes up the change alone, if it is not itself turned;
    otherwise the waters that are not turned do, in proportion to their shares, equally if these are all zero.
    Impossible (False) is what would need a negative share, or, with every share given, misses the whole.
    """
    settled = {water: np.asarray(turned.get(water, share), float) for water, share in shares.items()}
    free = [water for water in shares if water not in turned]
    if not turned or not free:
        total = sum(settled.values(), np.zeros(()))
        return settled, np.abs(total - WHOLE) <= TOLERANCE
    if balance in free:
        free = [balance]
    rest = WHOLE - sum((settled[water] for water in shares if water not in free), np.zeros(()))
    weight = sum(shares[water] for water in free)
    for water in free:
        part = shares[water] / weight if weight > 0 else 1 / len(free)
        settled[water] = np.maximum(rest, 0.0) * part
    return settled, rest >= -TOLERANCE
