"""The suite itself: no test depends on what ran before it in the same process."""

import asyncio
from typing import Any

import pytest


@pytest.mark.browser
def test_a_browser_leaves_no_event_loop_to_the_tests_after_it(browser: Any) -> None:
    """With a browser, its driver's event loop runs in this thread …"""
    assert asyncio._get_running_loop() is not None
    assert browser.is_connected()


def test_a_test_without_a_browser_has_its_thread_to_itself() -> None:
    """… and without one there is none, so that a test can run one of its own."""

    async def story() -> str:
        return "told"

    assert asyncio.run(story()) == "told"
