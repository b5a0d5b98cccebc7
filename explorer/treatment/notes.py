"""What the tool has to say beside its numbers."""

from dataclasses import dataclass
from typing import Literal


@dataclass(frozen=True)
class Note:
    """One sentence for the user: how serious (``info``, ``caution``, ``error``), where, and what."""

    level: Literal["info", "caution", "error"]
    where: str
    text: str
