"""Parts of the interactive screen that need no terminal: lines, fields, inputs, session, worker, journal."""

from __future__ import annotations

import inspect
import os
import threading
from dataclasses import replace
from pathlib import Path

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from cycle.case import Case, loads
from cycle.errors import CaseError
from tui import items, journal, keying, session
from tui.actions import ACTIONS
from tui.engine import Engine, Result
from tui.figures import Figures
from tui.journal import Journal
from tui.line import PLAIN, cells, clean, fit, line, reach, width, wrap
from tui.screens.desk import Desk
from tui.screens.main import MainScreen
from tui.session import Entry, Session

TEXT = """
format = 1
title = "invented for the tests of the screen"
[flight]
mach = 6.0
altitude = "85 kft"
[gas]
model = "constant-gamma"
[inlet]
adiabatic_efficiency = 0.9
temperature_ratio = 4.0
[fuel]
heating_value = "120 MJ/kg"
[combustor]
fuel_air_ratio = 0.005
[nozzle]
exit_area_over_capture = 1.5
"""


@pytest.fixture(scope="module")
def case() -> Case:
    return loads(TEXT, "screen")


@pytest.fixture
def ready(case: Case) -> Session:
    return session.loaded(Session("screen.toml"), case, None)


def figures(status: str = "solved", walk: object = None) -> Figures:
    """Figures with nothing in them but a status: enough for the session, which never looks inside."""
    return Figures(status, "scramjet", "", "", {}, {}, {}, {}, (), (), float("nan"), walk or object())


@given(st.text(max_size=30), st.integers(1, 40))
@settings(max_examples=50, deadline=None)
def test_any_text_fills_its_cells_exactly_and_sends_no_control_character(text: str, columns: int) -> None:
    row = cells(line(clean(text)), columns)
    assert len(row) == columns
    assert all(c.isprintable() for c, _ in row)
    assert width(fit(clean(text), columns)) <= columns


@given(st.lists(st.sampled_from("ab"), min_size=1, max_size=60), st.data())
@settings(max_examples=50, deadline=None)
def test_what_is_repainted_ends_on_the_last_changed_cell(old: list[str], data: st.DataObject) -> None:
    new = data.draw(st.lists(st.sampled_from("ab"), min_size=len(old), max_size=len(old)))
    before, after = [[(c, PLAIN) for c in text] for text in (old, new)]
    size = reach(before, after)
    assert before[size:] == after[size:]
    assert size == 0 or before[size - 1] != after[size - 1]


def test_wrap_keeps_words_whole_and_lines_short() -> None:
    assert wrap(["the", "stream", "as", "it", "arrives"], 10) == ["the stream", "as it", "arrives"]


def test_escape_sequences_in_a_title_are_disarmed() -> None:
    assert clean("a\x1b[2Jb\nc") == "a?[2Jb c"


def test_every_action_has_a_handler_its_own_keys_and_help() -> None:
    keys = [key for action in ACTIONS for key in action.keys]
    assert len(keys) == len(set(keys))
    for action in ACTIONS:
        assert callable(getattr(MainScreen, f"do_{action.name}"))
        assert action.help


def test_field_types_over_then_edits_in_place() -> None:
    entry = Entry("flight.altitude", "85 kft", 6, "kft")
    for key in "90":
        entry = keying.press(entry, key, key)
    assert (entry.text, entry.caret) == ("90", 2)
    entry = keying.press(keying.press(entry, "home", None), "1", "1")
    assert entry.text == "190"
    assert keying.press(entry, "delete", None).text == "10"
    assert keying.press(replace(entry, fresh=True), "backspace", None).text == ""


@pytest.mark.parametrize(
    ("key", "text", "unit", "value"),
    [
        ("flight.altitude", "90", "kft", "90 kft"),
        ("flight.altitude", "27 km", "kft", "27 km"),
        ("flight.altitude", "1e4", "", 1e4),
        ("combustor.fuel_air_ratio", "0.03", "", 0.03),
        ("combustor.fuel_air_ratio", "much", "", "much"),
        ("fuel.supply_pressure", "  ", "kPa", None),
        ("air.mole_fractions", "N2 0.7, O2 = 0.3", "", {"N2": 0.7, "O2": 0.3}),
    ],
)
def test_what_a_field_says(key: str, text: str, unit: str, value: object) -> None:
    assert items.typed(Entry(key, text, 0, unit)) == value


def test_inputs_are_shown_as_written_and_belong_to_their_station(ready: Session) -> None:
    first = {i.key: i for i in items.items(ready)}
    assert first["flight.altitude"].written == "85 kft"
    assert first["flight.temperature_offset"].default
    assert not any(key.startswith(("inlet.", "fuel.", "nozzle.")) for key in first)
    burner = {i.key for i in items.items(replace(ready, station="4"))}
    assert {"fuel.heating_value", "combustor.fuel_air_ratio"} <= burner
    everywhere = {i.key for s in session.columns_of(ready.case) for i in items.items(replace(ready, station=s))}
    assert ready.case is not None
    assert {s.input.key for s in ready.case.inputs()} <= everywhere


def test_us_customary_shows_inputs_in_its_units(ready: Session) -> None:
    fuel = {i.key: i.written for i in items.items(replace(session.toggled(ready), station="4"))}
    assert fuel["fuel.heating_value"].endswith("Btu/lbm")


def test_step_is_the_declared_one_in_the_users_unit_and_stops_at_a_bound(ready: Session) -> None:
    item = next(i for i in items.items(ready) if i.key == "flight.altitude")
    # 500 m is the declared step: 85 kft + 500 m = 86.640 kft
    assert items.stepped(item, 1) == ("86.6404 kft", "")
    inlet = next(i for i in items.items(replace(ready, station="2")) if i.key == "inlet.adiabatic_efficiency")
    assert items.stepped(replace(inlet, value=0.998), 1) == (1.0, "at its upper bound")
    assert items.stepped(replace(inlet, value=1.0), 1)[0] is None


def test_undo_and_redo_without_end(ready: Session) -> None:
    assert ready.case is not None
    now = ready
    for step in range(200):
        assert now.case is not None
        now = session.edited(now, now.case.replace({"flight.mach": 5.0 + 0.01 * step}), f"edit {step}")
    last = now.case
    for _ in range(200):
        now = session.undone(now)
    assert now.case == ready.case
    assert not now.unsaved
    assert session.undone(now).note == "nothing to undo"
    for _ in range(200):
        now = session.redone(now)
    assert now.case == last
    assert session.redone(now).note == "nothing to redo"


def test_an_edit_after_undo_drops_what_was_undone(ready: Session) -> None:
    assert ready.case is not None
    now = session.undone(session.edited(ready, ready.case.replace({"flight.mach": 5.0}), "one"))
    now = session.edited(now, ready.case.replace({"flight.mach": 7.0}), "two")
    assert now.future == ()


def test_stale_walks_change_nothing(ready: Session) -> None:
    assert ready.case is not None
    newer = session.edited(ready, ready.case.replace({"flight.mach": 5.0}), "mach")
    assert session.with_figures(newer, ready.generation, figures()) is newer


def test_a_failed_walk_keeps_the_last_good_one_and_cannot_be_pinned(ready: Session) -> None:
    good = session.with_figures(ready, ready.generation, figures())
    assert good.case is not None
    bad = session.edited(good, good.case.replace({"flight.mach": 5.0}), "mach")
    bad = session.with_figures(bad, bad.generation, figures("choked"))
    assert bad.failed
    assert bad.good is good.figures
    assert bad.pin is good.pin
    assert session.pinned(bad).note == "a case without a solution cannot be pinned"


def test_loaded_walk_is_the_first_pin_and_another_can_be_pinned(ready: Session) -> None:
    now = session.with_figures(ready, ready.generation, figures())
    assert now.pin is not None
    assert now.pin.label == "as loaded"
    assert now.case is not None
    now = session.edited(now, now.case.replace({"flight.mach": 5.0}), "Mach number 6 -> 5")
    assert session.pinned(now).note == "no walk of these inputs to pin yet"
    now = session.pinned(session.with_figures(now, now.generation, figures()))
    assert now.pin is not None
    assert now.pin.label == "Mach number 6 -> 5"


def test_switching_a_group_is_one_change_that_undo_takes_back(ready: Session) -> None:
    change = {"switch": ["inlet.end", "pressure_ratio", 60.0]}
    assert ready.case is not None
    now = session.edited(ready, session.apply(ready.case, change), "inlet")
    assert now.case is not None
    assert now.case.value("inlet.pressure_ratio") == 60.0
    assert now.case.value("inlet.temperature_ratio") is None
    assert session.undone(now).case == ready.case


def test_a_bad_edit_raises_and_says_what_is_allowed(ready: Session) -> None:
    assert ready.case is not None
    with pytest.raises(CaseError, match=r"inlet\.adiabatic_efficiency"):
        session.apply(ready.case, {"set": {"inlet.adiabatic_efficiency": 1.5}})


def test_worker_takes_the_newest_and_drops_the_ones_between() -> None:
    came: list[Result] = []
    done, hold, begun = threading.Event(), threading.Event(), threading.Event()

    def post(result: Result) -> None:
        came.append(result)
        if result.generation == 9:
            done.set()

    def first() -> str:
        begun.set()
        hold.wait(5)
        return "first"

    engine = Engine(post)
    engine.newest("solve", 1, first)
    engine.start()
    assert begun.wait(5)
    for generation in range(2, 10):
        engine.newest("solve", generation, lambda: "later")
    engine.do("write", 5, lambda: "kept")
    hold.set()
    assert done.wait(5)
    assert [(r.kind, r.generation) for r in came] == [("solve", 1), ("write", 5), ("solve", 9)]


def test_worker_carries_an_error_and_goes_on() -> None:
    came: list[Result] = []
    done = threading.Event()
    engine = Engine(lambda r: (came.append(r), done.set() if r.kind == "write" else None))
    engine.newest("solve", 1, lambda: 1 / 0)
    engine.start()
    engine.do("write", 1, lambda: "after")
    assert done.wait(5)
    kinds = {r.kind: r for r in came}
    assert kinds["write"].value == "after"


def left_by_another(state: Path, path: str, *records: journal.Record, tail: str = "") -> Path:
    """A journal as a session that was killed leaves it."""
    writer = Journal(path, journal.content_hash(path))
    for record in records:
        writer.append(record)
    (written,) = state.glob(f"{journal.stem(path)}-{os.getpid()}*.journal")
    text = written.read_text()
    writer.remove()
    file = state / writer_name(path)
    file.write_text(text + tail)
    return file


def writer_name(path: str) -> str:
    return f"{journal.stem(path)}-1.journal"


def test_journal_is_found_again_whole_and_cut_lines_are_left_out(state: Path, tmp_path: Path) -> None:
    path = tmp_path / "case.toml"
    path.write_text(TEXT)
    edit = {"edit": {"set": {"flight.mach": 7.0}}}
    file = left_by_another(state, str(path), edit, {"undo": 1}, tail='{"edit": {"se')
    left = journal.left_behind(str(path))
    assert left is not None
    assert left.records == (edit, {"undo": 1})
    assert left.same_file
    path.write_text(TEXT + "# changed\n")
    again = journal.left_behind(str(path))
    assert again is not None
    assert not again.same_file
    journal.discard(left)
    assert not file.exists()
    assert journal.left_behind(str(path)) is None


def test_journal_of_a_running_session_is_not_offered(state: Path, tmp_path: Path) -> None:
    path = str(tmp_path / "case.toml")
    running = Journal(path)
    running.append({"undo": 1})
    assert journal.left_behind(path) is None
    running.remove()
    assert list(state.iterdir()) == []


def test_journal_says_so_where_the_state_directory_cannot_be_written(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    (tmp_path / "file").write_text("")
    monkeypatch.setenv("XDG_STATE_HOME", str(tmp_path / "file"))
    kept = Journal("case.toml")
    kept.append({"undo": 1})
    assert kept.failure == "edits are not kept on disk: Not a directory"


def test_no_part_of_the_main_screen_takes_a_name_of_another() -> None:
    parts = [c for c in MainScreen.__mro__ if issubclass(c, Desk) and c is not Desk]
    owners: dict[str, list[str]] = {}
    for part in parts:
        for name, made in vars(part).items():
            if inspect.isfunction(made) and not hasattr(Desk, name):
                owners.setdefault(name, []).append(part.__name__)
    assert {name: who for name, who in owners.items() if len(who) > 1} == {}
