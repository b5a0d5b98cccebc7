"""Acid-base, ion-pair and saturation chemistry of natural and treated waters; knows numbers only.

Start at :class:`System`; a batch of totals goes in, a :class:`Solution` comes out.
"""

from .components import COMPONENT, COMPONENTS, FAMILIES, Component, WeakAcid
from .solution import Solution
from .system import System

__all__ = ["COMPONENT", "COMPONENTS", "FAMILIES", "Component", "Solution", "System", "WeakAcid"]
