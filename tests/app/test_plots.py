"""What drawing costs: updates stay cheap."""

import pytest
from bokeh.document import Document

from explorer.app.files import Shelf
from explorer.app.main import build
from explorer.scenario.shipped import shipped


def test_turning_a_dial_leaves_the_document_as_it_is_built(monkeypatch: pytest.MonkeyPatch) -> None:
    """No update makes Bokeh walk through all models of the page, which costs more than the chemistry."""
    shell = build(shipped()["amber"], shelf=Shelf())
    document = shell.template.server_doc(Document())
    shell.session.turn("train.hypo.dose", 1.3)
    walks = []
    monkeypatch.setattr(type(document.models), "recompute", lambda models: walks.append(models))
    shell.session.turn("train.hypo.dose", 1.4)
    shell.session.turn("waters.well.share", 55)
    assert walks == []
