"""The page without a browser: tiles, words, files, runner, guard."""

import asyncio
import threading
from concurrent.futures import ThreadPoolExecutor
from pathlib import Path
from types import SimpleNamespace

import numpy as np
import pytest
from bokeh.document import Document
from bokeh.models import Span

from explorer.app.choosers import default_range
from explorer.app.files import FileDesk, Shelf, blank, examples, file_name
from explorer.app.history import Work
from explorer.app.look import DARK
from explorer.app.main import build
from explorer.app.runner import Conflate
from explorer.app.shell import Shell
from explorer.app.state import Session
from explorer.app.summary import foot_line
from explorer.app.tiles import default_tiles, gauge
from explorer.scenario.files import LARGEST_FILE, dumps, open_scenario, read_scenario
from explorer.scenario.model import Target
from explorer.scenario.shipped import shipped

WELL = "waters.well.share"


@pytest.fixture
def shell() -> Shell:
    """The page of the shipped river and wellfield."""
    return build(shipped()["amber"], shelf=Shelf())


def words(shell: Shell, key: str) -> str:
    return shell.tiles.shown(f"tile:{key}").words()


def curve(shell: Shell, plot: str) -> np.ndarray:
    return np.asarray(shell.views["sweep"].plots.plots[plot].lines.data["ys"][0])


def test_whole_page_can_be_built_for_every_shipped_scenario() -> None:
    """Each of them fills all places of the page."""
    for path in shipped().values():
        shell = build(path, shelf=Shelf())
        document = shell.template.server_doc(Document())
        assert {root.name for root in document.roots} >= set(shell.places)
        assert shell.session.message == ""


def test_tile_gives_value_unit_state_and_meaning(shell: Shell) -> None:
    """Everything a tile says is there in words."""
    said = words(shell, "ccpp")
    assert said.startswith("CaCO₃ dissolves −8.5 mg/L as CaCO₃ ▼ below")
    assert "Target at least −5 mg/L as CaCO₃" in said and "Source: " in said


def test_tile_without_value_says_so() -> None:
    """Without chlorine there is no share of it, and no zero either."""
    shell = build(shipped()["amber"], shelf=Shelf())
    shell.session.edit("Remove", lambda scenario: _without_steps(scenario))
    assert "no value" in words(shell, "hocl_percent")


def _without_steps(scenario: object) -> None:
    scenario.train.clear()


def test_targets_come_first_among_the_tiles() -> None:
    """Seven tiles; with more targets, up to eight."""
    targets = [Target(readout="nitrate", high=50), Target(readout="ph", low=7)]
    keys = default_tiles(targets)
    assert keys[:2] == ["nitrate", "ph"] and len(keys) == len(set(keys)) == 7
    many = [
        Target(readout=key, high=1)
        for key in ("boron", "silica", "sodium", "chloride", "sulfate", "tds", "dic")
    ]
    assert len(default_tiles([*many, *targets])) == 8


def test_chosen_tiles_stay_within_five_to_eight(shell: Shell) -> None:
    """A choice that would leave too few is not taken."""
    for key in list(shell.tiles.chosen):
        shell.tiles.report(f"choose:{key}", False)
    assert len(shell.tiles.chosen) == 5
    shell.tiles.report("choose:tds", True)
    assert "tds" in shell.tiles.chosen


@pytest.mark.parametrize(
    ("value", "band", "places"),
    [
        (5.0, (2.0, 8.0), (20.0, 80.0, 50.0)),
        (12.0, (2.0, None), (20.0, 100.0, 100.0)),
        (float("nan"), (None, 8.0), (0.0, 80.0, None)),
    ],
)
def test_gauge_places(value: float, band: tuple, places: tuple) -> None:
    """Band and needle lie on the axis of the plot; what is beyond stays at the end."""
    drawn = gauge(value, (0.0, 10.0), band)
    assert (drawn.start, drawn.stop, drawn.at) == pytest.approx(places)


def test_another_dial_changes_all_plots_but_not_their_models(shell: Shell) -> None:
    """Figures are built once; turning changes columns."""
    figures = [plot.figure for plot in shell.views["sweep"].plots.plots.values()]
    count = len(figures[0].references())
    before = curve(shell, "ph").copy()
    shell.session.turn("waters.river.analysis.ph", 8.2)
    assert not np.allclose(before, curve(shell, "ph"))
    assert [plot.figure for plot in shell.views["sweep"].plots.plots.values()] == figures
    assert len(figures[0].references()) == count


def test_dragged_point_turns_the_dial_to_its_step(shell: Shell) -> None:
    """The noise of a drag is rounded away; the point is one and the same in all plots."""
    spans = {
        id(span)
        for plot in shell.views["sweep"].plots.plots.values()
        for span in plot.figure.select(Span)
        if span.name == "operating-point"
    }
    assert len(spans) == 1
    shell.views["sweep"].plots.point.location = 62.2999873
    step = shell.session.dials[WELL].step
    assert shell.session.value(WELL) == pytest.approx(62.3, abs=step / 2)
    assert shell.session.value(WELL) / step == pytest.approx(round(shell.session.value(WELL) / step))


def test_point_follows_the_dial(shell: Shell) -> None:
    """A share typed in the rail moves the point in the plots, once."""
    shell.session.turn(WELL, 25)
    assert shell.views["sweep"].plots.point.location == pytest.approx(25)
    assert len(shell.session.work.past) == 1


def test_axes_stay_while_a_dial_is_turned_a_little(shell: Shell) -> None:
    """The curve moves, the axis does not."""
    plots = shell.views["sweep"].plots.plots.values()
    limits = [(plot.y_range.start, plot.y_range.end) for plot in plots]
    shell.session.turn("train.hypo.dose", 1.3)
    assert [(plot.y_range.start, plot.y_range.end) for plot in plots] == limits


def test_plots_carry_words_that_follow_the_data(shell: Shell) -> None:
    """What a screen reader says of a plot changes with the curve."""
    figure = shell.views["sweep"].plots.plots["ph"].figure
    before = figure.html_attributes["aria-label"]
    assert before.startswith("pH against share of Granite Wellfield")
    shell.session.choose_season("summer")
    assert figure.html_attributes["aria-label"] != before


def test_a_plot_can_look_anywhere_in_the_plant(shell: Shell) -> None:
    """Any readout and family of species behind any step; a place that goes away gives way to the end."""
    view, session = shell.views["sweep"], shell.session
    session.choose(readout="ph", **{"chosen stage": "river", "species stage": "blend"})
    pictures, _ = view.pictures()
    swept = session.swept
    assert pictures["chosen"].title == "pH, Fern River"
    assert pictures["chosen"].lines[0].y == pytest.approx(swept.outcome.readout("ph", "river"))
    assert pictures["chosen"].band is None and pictures["ph"].band is not None
    assert pictures["species"].title == "Carbonate species, Blend"
    session.choose(**{"chosen stage": "long gone"})
    assert view.pictures()[0]["chosen"].title == "pH"


def test_dark_palette_reaches_the_curves(shell: Shell) -> None:
    """Colours in columns are exchanged with the palette."""
    shell.views["sweep"].restyle(DARK)
    assert shell.views["sweep"].plots.plots["ph"].lines.data["colour"] == [DARK.accent]
    assert shell.views["sweep"].plots.plots["species"].lines.data["colour"][0] == DARK.series[0]


def test_gap_in_the_sweep_is_drawn_and_explained(shell: Shell) -> None:
    """Where no water has the entered pH the curve has a gap, and its reason stands beside the controls."""
    assert shell.session.set_sweep(dial="waters.river.analysis.ph", start=6, stop=14) == ""
    plot = shell.views["sweep"].plots.plots["ph"]
    assert np.isnan(curve(shell, "ph")[-1])
    assert len(plot.gaps.data["x0"]) == 1
    assert "▲ No result from " in shell.views["sweep"].controls.describe().words()


def test_refused_range_stays_beside_its_field(shell: Shell) -> None:
    """A sweep of no length is refused in words and nothing is swept anew."""
    before = shell.session.swept
    shell.views["sweep"].controls.report("stop", "0")
    assert "differ" in shell.views["sweep"].controls.describe().words()
    assert shell.session.swept is before


@pytest.mark.parametrize(
    ("dial", "swept"),
    [
        (
            {"label": "Share", "unit": "%", "low": 0.0, "high": 100.0, "value": 40.0, "step": 0.5},
            (0.0, 100.0),
        ),
        (
            {"label": "pH of River", "unit": "", "low": 0.0, "high": 14.0, "value": 8.6, "step": 0.05},
            (7.0, 11.0),
        ),
        (
            {"label": "Dose", "unit": "mg/L", "low": 0.0, "high": None, "value": 12.3, "step": 0.1},
            (0.0, 30.0),
        ),
        ({"label": "Dose", "unit": "mg/L", "low": 0.0, "high": None, "value": 0.0, "step": 0.1}, (0.0, 2.0)),
    ],
)
def test_range_of_a_new_dial_is_round(dial: dict, swept: tuple[float, float]) -> None:
    """What is swept first lies around the value, between round numbers."""
    assert default_range(SimpleNamespace(**dial)) == swept


def test_foot_line_names_temperature_and_open_steps() -> None:
    """Season, air contact and caution are always in view."""
    cinder = build(shipped()["cinder"], shelf=Shelf()).session.point
    assert "42.0 °C, closed to air except in Tower." in foot_line(cinder)
    assert "regulator" in foot_line(None)


def test_title_is_edited_in_place(shell: Shell) -> None:
    """A new title is one step; an empty one is refused."""
    shell.bar.report("title", "River and hill")
    assert shell.session.scenario.title == "River and hill"
    shell.bar.report("title", "  ")
    assert shell.session.scenario.title == "River and hill"
    assert "a title is needed" in shell.bar.describe().words()


# ---- files --------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("content", "part"),
    [
        (b"\xff\xfe", "was not opened"),
        (b"[]", "was not opened"),
        (b" " * (LARGEST_FILE + 1), "larger than"),
    ],
)
def test_unreadable_file_is_refused_in_a_sentence(shell: Shell, content: bytes, part: str) -> None:
    """The scenario on the page stays as it is."""
    before = dumps(shell.session.scenario)
    assert part in shell.files.open_bytes(content, "some.json")
    assert shell.session.message.startswith("some.json")
    assert dumps(shell.session.scenario) == before


def test_opened_file_replaces_the_scenario(shell: Shell) -> None:
    """Opening begins a new history under the name of the file."""
    content = Path(shipped()["moss"]).read_bytes()
    assert shell.files.open_bytes(content, "moss.json") == ""
    assert shell.session.file_name == "moss.json" and not shell.session.unsaved


def test_messages_from_the_page_that_make_no_sense_are_passed_over(shell: Shell) -> None:
    """Nothing the page may send raises."""
    for message in (
        None,
        [],
        {},
        {"act": "fly"},
        {"act": "open", "content": "%%"},
        {"act": "open", "content": 3},
    ):
        shell.files._handle_msg(message)
    assert shell.session.scenario.title.startswith("Amber")


@pytest.mark.parametrize(
    ("title", "name"),
    [("Amber: river & wells", "amber-river-wells.json"), ("../../etc", "etc.json"), ("***", "scenario.json")],
)
def test_file_name_from_a_title(title: str, name: str) -> None:
    """Only letters, digits and hyphens."""
    assert file_name(title) == name


def test_shelf_keeps_the_newest_working_copies() -> None:
    """A reload gets a copy; the oldest copy is forgotten when the shelf is full."""
    shelf = Shelf(limit=2)
    works = {name: Work(open_scenario(shipped()["amber"])) for name in "abc"}
    for name, work in works.items():
        shelf.keep(name, work)
    assert shelf.take("a") is None
    taken = shelf.take("c")
    assert taken is not works["c"] and taken.scenario.same_as(works["c"].scenario)


def test_save_marks_the_scenario_as_saved(shell: Shell, monkeypatch: pytest.MonkeyPatch) -> None:
    """What is handed to the browser is the text of the file."""
    sent = []
    monkeypatch.setattr(FileDesk, "_send_msg", lambda self, message: sent.append(message))
    shell.session.turn(WELL, 33)
    shell.files.save()
    name, kind = "amber.json", "application/json"
    assert sent == [{"text": dumps(shell.session.scenario), "name": name, "type": kind}]
    assert not shell.session.unsaved


def test_the_report_holds_the_scenario_as_it_stands(shell: Shell, monkeypatch: pytest.MonkeyPatch) -> None:
    """It goes to the browser as one page, from which the very scenario can be opened again."""
    sent = []
    monkeypatch.setattr(FileDesk, "_send_msg", lambda self, message: sent.append(message))
    shell.session.turn(WELL, 33)
    shell.files.report()
    (message,) = sent
    assert (message["name"], message["type"]) == ("amber-river-and-wellfield-report.html", "text/html")
    assert read_scenario(message["text"]).same_as(shell.session.scenario)
    assert not shell.files.writing
    assert shell.session.unsaved, "a report is no saved scenario"


def test_a_report_that_cannot_be_written_says_why(shell: Shell, monkeypatch: pytest.MonkeyPatch) -> None:
    """In the message line, each time it is asked for; the button is ready again."""

    def refused(*arguments: object, **settings: object) -> str:
        raise ValueError("no water flows")

    monkeypatch.setattr("explorer.report.report_html", refused)
    for _ in range(2):
        shell.session.message = ""
        shell.files.report()
        assert shell.session.message == "The report was not written: no water flows"
        assert not shell.files.writing


def test_start_file_that_cannot_be_read_is_said_so(tmp_path: Path) -> None:
    """The page comes up with the shipped demo and the sentence."""
    shell = build(tmp_path / "gone.json", shelf=Shelf())
    assert shell.session.message.startswith("gone.json was not opened: ")
    assert shell.session.point is not None


# ---- runner -------------------------------------------------------------------------------------------


def test_runner_skips_to_the_newest_input_and_applies_what_it_began() -> None:
    """While one calculation runs, of those that come meanwhile only the last is run."""
    began, go_on, applied = threading.Event(), threading.Event(), []

    def slow() -> str:
        began.set()
        go_on.wait(10)
        return "first"

    async def drag() -> None:
        with ThreadPoolExecutor(1) as pool:
            runner = Conflate(pool=pool)
            runner.submit(slow, applied.append)
            while not began.is_set():
                await asyncio.sleep(0.001)
            for name in ("second", "third", "fourth"):
                runner.submit(lambda name=name: name, applied.append)
            go_on.set()
            while runner.busy:
                await asyncio.sleep(0.001)

    asyncio.run(drag())
    assert applied == ["first", "fourth"]


def test_runner_goes_on_after_a_failure() -> None:
    """A view that fails to show a result does not stop later ones."""
    applied = []

    async def two() -> None:
        with ThreadPoolExecutor(1) as pool:
            runner = Conflate(pool=pool)
            runner.submit(lambda: 1, lambda result: 1 / 0)
            while runner.busy:
                await asyncio.sleep(0.001)
            runner.submit(lambda: 2, applied.append)
            while runner.busy:
                await asyncio.sleep(0.001)

    asyncio.run(two())
    assert applied == [2]


def test_runner_without_a_loop_works_at_once() -> None:
    """Scripts and tests see the result when the call returns."""
    applied = []
    Conflate().submit(lambda: 5, applied.append)
    assert applied == [5]


def test_session_of_a_page_has_no_widget() -> None:
    """The state is importable and usable without Panel's widgets."""
    session = Session(open_scenario(shipped()["amber"]))
    session.solve_now()
    assert float(session.point.readout("ph")) == pytest.approx(7.47, abs=0.05)


def test_examples_tell_what_they_are_about() -> None:
    """Each with its title and one sentence."""
    assert set(examples()) == set(shipped())
    for example in examples().values():
        assert example.title and 20 < len(example.story) <= 240 and example.story[-1] in ".?!"


def test_new_scenario_is_one_assumed_water(shell: Shell) -> None:
    """It has results at once, and undo leads back to what was there."""
    assert all(entry.assumed for entry in blank().waters[0].analyses["all year"].entries.values())
    shell.session.turn(WELL, 55)
    shell.bar.report("example-new")
    assert [water.name for water in shell.session.scenario.waters] == ["New water"]
    assert np.isfinite(float(shell.session.point.readout("ph"))) and not shell.session.unsaved
    shell.session.undo()
    assert shell.session.value(WELL) == 55


def test_saving_under_another_name(shell: Shell) -> None:
    """The name is made fit for a file and remembered; a file that was opened keeps its own."""
    shell.files.save()
    assert shell.session.offered.name == "amber.json"
    shell.files.save("Board meeting: B.json")
    assert shell.session.offered.name == "board-meeting-b.json"
    shell.files.save()
    assert shell.session.offered.name == "board-meeting-b.json"
    shell.files.open_bytes(dumps(shell.session.scenario).encode(), "Moss (summer) 2.json")
    shell.files.save()
    assert shell.session.offered.name == "Moss (summer) 2.json"
    shell.files.open_bytes(dumps(shell.session.scenario).encode(), "../../etc/pass<wd>.json")
    shell.files.save()
    assert shell.session.offered.name == "etc-pass-wd.json"


def test_what_is_no_file_of_the_users_is_named_by_its_title(shell: Shell) -> None:
    """An example, and a new scenario; undo brings the name back too."""
    shell.files.open_example("moss")
    shell.files.save()
    assert shell.session.offered.name == "moss-soft-coloured-upland-water.json"
    shell.files.new()
    shell.files.save()
    assert shell.session.offered.name == "new-scenario.json"
    shell.session.undo()
    shell.session.undo()
    assert shell.session.file_name == "amber.json"


def test_keys_open_views_and_move_the_operating_point(shell: Shell) -> None:
    """A number opens a view; arrows move along the sweep and stop at its end; others are passed over."""
    shell.help._handle_msg({"view": 2})
    assert shell.views.shown == "window"
    for strange in ({"view": 99}, {"view": "2"}, {"steps": 1000}, "?"):
        shell.help._handle_msg(strange)
    assert shell.views.shown == "window"
    shell.help._handle_msg({"steps": 10})
    assert shell.session.value(WELL) == 50
    for _ in range(7):
        shell.help._handle_msg({"steps": 10})
    assert shell.session.value(WELL) == 100
