"""Plots are saved as figures, drawing and picture, under names that say what they are."""

import csv
import io
from typing import Any
from xml.etree.ElementTree import fromstring

import numpy as np
import pytest

from explorer.app.compare_view import CompareView
from explorer.app.saving import save_menu
from explorer.app.state import Session
from explorer.app.sweep_view import SweepView
from explorer.app.titration_view import TitrationView
from explorer.app.tolerance_view import ToleranceView
from explorer.app.window_view import WindowView
from explorer.scenario.files import open_scenario
from explorer.scenario.shipped import shipped
from explorer.studies.pictures import axis


def session_of(name: str) -> Session:
    session = Session(open_scenario(shipped()[name]))
    session.solve_now()
    return session


def opened(kind: Any, name: str = "amber") -> Any:
    view = kind(session_of(name))
    view.opened()
    return view


def figures(session: Session) -> list[list[str]]:
    return list(csv.reader(io.StringIO(session.offered.text.removeprefix("\ufeff"))))


def test_curves_are_saved_as_they_are_drawn() -> None:
    """Every figure of the curve, at every place of the dial, named and with its unit."""
    view = opened(SweepView)
    view.heads["buffer"].report("save:csv")
    heading, *rows = figures(view.session)
    assert heading[:2] == ["Share of Granite Wellfield [%]", "Buffer intensity [mmol/L per pH]"]
    drawn = view.plots.plots["buffer"].picture
    assert [float(row[0]) for row in rows] == pytest.approx(drawn.x)
    assert [float(row[1]) for row in rows] == pytest.approx(drawn.lines[0].y)
    assert view.session.offered.name == "amber-river-and-wellfield-sweep-buffer-intensity.csv"


@pytest.mark.parametrize(("ending", "kind"), [("svg", "image/svg+xml"), ("png", "image/png")])
def test_a_drawing_is_whole_in_itself(ending: str, kind: str) -> None:
    """An SVG file with heading, style and the scenario it is of; the page makes the picture of the same."""
    view = opened(SweepView)
    view.heads["ph"].report(f"save:{ending}")
    offered = view.session.offered
    assert (offered.name, offered.kind) == (f"amber-river-and-wellfield-sweep-ph.{ending}", kind)
    root = fromstring(offered.text)
    said = ["".join(part.itertext()) for part in root.iter() if part.tag.endswith("text")]
    assert {"pH", "target at least 7.4", "Amber: river and wellfield · winter"} <= set(said)
    assert "var(" not in offered.text and "http" not in offered.text.replace("http://www.w3.org/2000/svg", "")


@pytest.mark.parametrize(
    ("kind", "saved"),
    [
        (WindowView, lambda view: view.plate),
        (ToleranceView, lambda view: view.plate),
        (ToleranceView, lambda view: view.head._save()[1].children[0] and (lambda: view.plots.plate("fan"))),
        (TitrationView, lambda view: view.heads["diagram"].saved),
        (CompareView, lambda view: view.head.saved),
    ],
    ids=["map", "distribution", "spread", "diagram", "compared"],
)
def test_every_plot_of_the_studies_is_saved(kind: Any, saved: Any) -> None:
    """Each gives a drawing that is well-formed and figures below a heading of as many columns."""
    view = opened(kind)
    plate = saved(view)()
    assert plate.title and plate.name
    fromstring(str(plate.drawn()))
    heading, *rows = plate.rows()
    assert len(rows) > 20 and all(len(row) == len(heading) for row in rows)


def test_a_name_from_a_file_neither_leads_a_formula_nor_a_path() -> None:
    """Texts that a spreadsheet would run are quoted; the file name has letters, digits and hyphens."""
    session = session_of("amber")
    session.scenario.title = "../=cmd|' /C'!A0"
    view = SweepView(session)
    view.opened()
    picture, along = view.plots.plots["ph"].picture, axis("=1+1", "%", np.array([0.0, 1.0]))
    view.plots.show({"ph": picture}, along)
    view.heads["ph"].report("save:csv")
    assert figures(session)[0][0] == "'=1+1 [%]"
    assert session.offered.name == "cmd-c-a0-sweep-ph.csv"


def test_what_is_empty_is_not_saved() -> None:
    """A sentence says so."""
    session = session_of("amber")
    _, sheet = save_menu(session, lambda: None, "nothing")
    sheet.children[0].on(None)
    assert session.offered is None and "nothing to save" in session.message
