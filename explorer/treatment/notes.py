"""What the tool has to say beside its numbers."""

from dataclasses import dataclass
from typing import Literal


@dataclass(frozen=True)
class Note:
    """One sentence for the user: how serious (``info``, ``caution``, ``error``), where, and what.

    ``key`` names the kind of an alarm, "" for a remark; ``source`` says where the rule of an alarm is from.
    """

    level: Literal["info", "caution", "error"]
    where: str
    text: str
    key: str = ""
    source: str = ""
