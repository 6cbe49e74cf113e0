"""Modules of the pages asked by themselves, in the browser that runs them: projection and scales.

Idea: what a module draws by is held to plain vector arithmetic in NumPy. Left out: the pages.
"""

from collections.abc import Callable, Iterator
from typing import Any

import numpy as np
import pytest

from tests.browser.chromium import Screen
from tests.conftest import ServerProcess

ASK = """
const [file, values, done] = arguments;
import(file).then((all) => { %s })
  .then((value) => done({ value }), (error) => done({ error: String(error) }));
"""


@pytest.fixture(scope="module")
def ask(tab: Screen, demo: ServerProcess) -> Iterator[Callable[..., Any]]:
    """Run the body of a function with all that a module exports, and return what it returns."""
    # A page of the same host that asks for nothing of itself.
    tab.open(f"{demo.url}/livez")

    def run(file: str, body: str, *values: Any) -> Any:
        told = tab.driver.execute_async_script(ASK % body, f"/pages/{file}", values)
        assert "error" not in told, told
        return told["value"]

    yield run
    tab.forget()


@pytest.mark.parametrize(
    ("kind", "yaw", "pitch"),
    [("elevation", 0, 0), ("plan", 0, 0), ("side", 0, 0), ("free", 0.7, 0.4), ("free", -2.9, -1.2)],
)
def test_a_view_is_a_right_handed_set_of_axes(
    ask: Callable[..., Any], kind: str, yaw: float, pitch: float
) -> None:
    seen = ask("projection.js", "return all.view(...values)", kind, yaw, pitch)
    axes = np.array([seen["across"], seen["up"], seen["toward"]])
    assert np.allclose(axes @ axes.T, np.eye(3), atol=1e-12)
    assert np.isclose(np.linalg.det(axes), 1.0)
    if kind == "free":
        assert abs(axes[0, 2]) < 1e-12, "the ground stays level however it is turned"


def test_a_drawing_is_to_the_scale_it_names(ask: Callable[..., Any]) -> None:
    """A metre at 1:15 is 66.67 mm of paper, 251.97 CSS pixels of a 96th of an inch."""
    body = """
      const put = all.fitted(all.view("elevation"), [[0, 0, 0], [1000, 400, 900]],
        { x: 0, y: 0, width: 300, height: 300 }, all.MM_IN.mm);
      return [put.scale.words, put([0, 0, 0]), put([1000, 0, 0]), put([0, 0, 900])];
    """
    words, origin, right, top = ask("projection.js", body)
    assert words == "1:15"
    assert right[0] - origin[0] == pytest.approx(1000 / 15 / 25.4 * 96)
    assert origin[1] - top[1] == pytest.approx(900 / 15 / 25.4 * 96)
    assert right[1] == pytest.approx(origin[1])
    assert (right[0] + origin[0]) / 2 == pytest.approx(150)


@pytest.mark.parametrize(("mm_per_unit", "unit"), [(1, "mm"), (1000, "m"), (25.4, "in")])
def test_whatever_is_fitted_has_room(
    ask: Callable[..., Any], mm_per_unit: float, unit: str
) -> None:
    drawn = np.random.default_rng(20_261).uniform(-2000, 2000, (40, 2, 3)) / mm_per_unit
    boxes = np.stack([drawn.min(axis=1), drawn.max(axis=1)], axis=1)
    body = """
      const [boxes, unit] = values;
      return boxes.map((box, i) => {
        const looked = all.view("free", i, 0.3 * Math.sin(i));
        const room = { x: 10, y: 20, width: 390, height: 250 };
        const put = all.fitted(looked, box, room, all.MM_IN[unit]);
        const corners = [];
        for (const x of [0, 1]) for (const y of [0, 1]) for (const z of [0, 1])
          corners.push(put([box[x][0], box[y][1], box[z][2]]));
        return [put.scale.words, corners];
      });
    """
    for words, corners in ask("projection.js", body, boxes.tolist(), unit):
        assert words.count(":") == 1
        low, high = np.min(corners, axis=0), np.max(corners, axis=0)
        assert (low[:2] >= [10 - 1e-6, 20 - 1e-6]).all()
        assert (high[:2] <= [400 + 1e-6, 270 + 1e-6]).all()


def test_round_lengths(ask: Callable[..., Any]) -> None:
    told = ask(
        "projection.js",
        "return values.map(([px, per]) => all.roundLength(px, per))",
        *([100, 0.25], [100, 1.0], [99, 1.0], [100, 300.0]),
    )
    assert told == pytest.approx([200, 100, 50, 0.2])


@pytest.mark.parametrize(
    ("value", "decimals", "shown"),
    [
        (-0.004, 2, "0.00"),
        (-0.006, 2, "−0.01"),
        (0, 1, "0.0"),
        (-0.0, 1, "0.0"),
        (1234.56, 1, "1234.6"),
        (-90, 2, "−90.00"),
        (None, 2, "–"),
    ],
)
def test_numbers_have_fixed_digits_and_a_true_minus(
    ask: Callable[..., Any], value: float | None, decimals: int, shown: str
) -> None:
    assert ask("numbers.js", "return all.number(...values)", value, decimals) == shown


@pytest.mark.parametrize(
    ("text", "value"),
    [
        (" 12,5 ", 12.5),
        ("−90", -90.0),
        ("1.5E+01", 15.0),
        ("+.5", 0.5),
        ("", None),
        ("1,234.5", None),
        ("0x10", None),
        ("1e999", None),
        ("12 5", None),
        ("<b>", None),
    ],
)
def test_typed_numbers(ask: Callable[..., Any], text: str, value: float | None) -> None:
    # What is no finite number becomes null on its way here.
    body = "const read = all.typed(values[0]); return Number.isFinite(read) ? read : null"
    assert ask("numbers.js", body, text) == value


@pytest.mark.parametrize(
    ("ms", "shown"),
    [(-5, "0.0 s"), (90, "0.1 s"), (9_960, "10 s"), (14_200, "14 s"), (180_000, "3 min")],
)
def test_ages(ask: Callable[..., Any], ms: float, shown: str) -> None:
    assert ask("numbers.js", "return all.age(values[0])", ms) == shown


def test_events_are_whole_however_their_bytes_come(ask: Callable[..., Any]) -> None:
    sent = 'retry: 2000\n\n: \n\nid: 7\nevent: pose\ndata: {"a": 1,\ndata: "b": ":"}\n\ndata: x\n\n'
    body = """
      const [sent, step] = values;
      const told = [];
      const take = all.events((name, data, id) => told.push([name, data, id]));
      for (let at = 0; at < sent.length; at += step) take(sent.slice(at, at + step));
      return told;
    """
    for step in (1, 2, 3, 5, 7, 1000):
        told = ask("ask.js", body, sent, step)
        assert told == [["pose", '{"a": 1,\n"b": ":"}', "7"], ["message", "x", ""]]


def test_cards_fill_the_screen_and_never_more(ask: Callable[..., Any]) -> None:
    """All cards are seen where figures stay legible; else the board scrolls, by few rows."""
    screens = [(1896, 964), (1248, 684), (366, 560)]
    body = "return values[0].map(([n, w, h]) => all.cardsFitted(n, w, h))"
    asked = [(count, *size) for size in screens for count in (1, 2, 7, 8, 12, 30, 50)]
    for (count, width, height), told in zip(asked, ask("board_fit.js", body, asked), strict=True):
        rows = -(-count // told["columns"])
        across = (width - 12 * (told["columns"] - 1)) / told["columns"]
        assert told["figure"] * 5.85 <= across, "eight characters, axis and unit have room"
        assert told["words"] >= 14
        if rows * told["high"] + 12 * (rows - 1) <= height + rows:
            assert told["figure"] >= 26
        else:
            assert told["columns"] == {1896: 6, 1248: 4, 366: 1}[width]
    assert ask("board_fit.js", body, [(12, 1896, 964)])[0]["columns"] == 4
    assert ask("board_fit.js", "return all.cardsFitted(12, 1896, 964, 6).columns") == 6
    # As many as have room for their words, however many are asked for.
    assert ask("board_fit.js", "return all.cardsFitted(12, 1248, 684, 12).columns") == 5
    assert ask("board_fit.js", "return all.cardsFitted(12, 200, 684, 12).columns") == 1


@pytest.mark.parametrize(
    ("said", "shown"),
    [
        ("base direction (0.95, -0.05, 0.30)", "base direction (0.95, −0.05, 0.30)"),
        ("-1 x row 2", "−1 x row 2"),
        ("arm-2, fixture-1 of 2-3 at 1e-09", "arm-2, fixture-1 of 2-3 at 1e-09"),
    ],
)
def test_sentences_have_true_minus_signs(ask: Callable[..., Any], said: str, shown: str) -> None:
    assert ask("numbers.js", "return all.signs(values[0])", said) == shown


def test_elements_take_text_as_text(ask: Callable[..., Any]) -> None:
    body = """
      const made = all.el("p", { title: values[0], lang: null }, values[0], 3, [null]);
      return [made.outerHTML, made.textContent, made.children.length];
    """
    hostile = "<img src=x onerror=alert(1)>\"'"
    markup, text, children = ask("elements.js", body, hostile)
    assert (text, children) == (hostile + "3", 0)
    assert "&lt;img" in markup
