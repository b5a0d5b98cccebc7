"""The switch between light and dark; applies at once to page and plots."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import param
from panel.custom import JSComponent

from explorer.app.look import DARK, LIGHT, VIEW_STYLES, Palette, styles


class ThemeSwitch(JSComponent):
    """A button; ``dark`` says what is on. ``palette`` is the palette that goes with it."""

    dark = param.Boolean(default=False)

    _esm = "theme.js"

    def __init__(self, **settings: Any) -> None:
        super().__init__(stylesheets=styles(VIEW_STYLES), **settings)

    @property
    def palette(self) -> Palette:
        return DARK if self.dark else LIGHT

    def follow(self, restyle: Callable[[Palette], None]) -> None:
        """Call ``restyle`` now and on every switch."""
        restyle(self.palette)
        self.param.watch(lambda event: restyle(self.palette), "dark")
