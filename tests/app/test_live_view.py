"""Trees of nodes on the page: what is sent when, and who hears what the user does."""

import json
from typing import Any

import pytest

from explorer.app.live_view import LiveView, Node, node


class Board(LiveView):
    """A view of a list of words, for the tests."""

    def __init__(self, *words: str) -> None:
        self.words, self.heard = list(words), []
        super().__init__()
        self.refresh()

    def describe(self) -> Node:
        return node("ul", "board", *(self._item(place, word) for place, word in enumerate(self.words)))

    def _item(self, place: int, word: str) -> Node:
        return node("li", text=word, key=f"word-{place}", on=lambda value: self.heard.append((place, value)))


def sent(board: Board) -> dict[str, Any]:
    return json.loads(board.patch).get("changes", {})


def test_another_text_is_sent_alone() -> None:
    """While the shape is the same, only the attributes that differ are sent; the tree on the page stays."""
    board = Board("one", "two")
    tree = board.tree
    board.words[1] = "three"
    board.refresh()
    assert board.tree == tree
    assert sent(board) == {"2": {"text": "three"}}


def test_another_shape_is_sent_whole() -> None:
    """A node more or less sends the tree anew, without leftover changes."""
    board = Board("one", "two")
    board.words[0] = "uno"
    board.refresh()
    board.words.append("three")
    board.refresh()
    assert "three" in board.tree
    assert sent(board) == {}


def test_a_change_taken_back_is_sent_too() -> None:
    """Changes add up since the last tree, so whoever sees only the last patch still ends up right."""
    board = Board("one", "two")
    for word in ("three", "one"):
        board.words[0] = word
        board.refresh()
    assert sent(board) == {"1": {"text": "one"}}


def test_nothing_new_sends_nothing() -> None:
    """Refreshing an unchanged view is silent."""
    board = Board("one")
    before = (board.tree, board.patch)
    board.refresh()
    assert (board.tree, board.patch) == before


def test_report_reaches_the_node() -> None:
    """What the page reports goes to the handler of the key, with its value."""
    board = Board("one", "two")
    board._handle_msg({"key": "word-1", "value": "pressed"})
    assert board.heard == [(1, "pressed")]


@pytest.mark.parametrize("message", [None, "text", {}, {"key": 3}, {"key": "gone", "value": 1}])
def test_report_that_means_nothing_is_passed_over(message: Any) -> None:
    """A stale key or a malformed report changes nothing and raises nothing."""
    board = Board("one")
    board._handle_msg(message)
    assert board.heard == []


def test_text_is_made_plain() -> None:
    """Control and direction-changing characters of foreign text do not reach the page; markup stays text."""
    assert node("span", text="a\u202eb\x00<img src=x>").properties["text"] == "ab<img src=x>"


def test_absent_attributes_and_children_are_left_out() -> None:
    """None and False are no attributes, None is no child, and names get their dashes."""
    made = node("input", "number", None, disabled=False, title=None, aria_label="Share")
    assert made.properties == {"class": "number", "aria-label": "Share"}
    assert made.children == []
