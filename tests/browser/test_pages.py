"""The html pages in a browser: quiet, self-contained, readable on a desk, a phone, in the dark, on paper."""

from __future__ import annotations

import json
import os
import shutil
import subprocess
from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest

pytestmark = pytest.mark.browser

Pages = Callable[..., Path]
REPORT = ("report", "--pumps", "1")
COMMANDS = (REPORT, ("header",), ("shortlist", "--all"), ("trims", "250-400-4 F"))
DESK, PHONE = (1366, 900), (360, 740)
A4, LETTER = (8.27, 11.69), (8.5, 11.0)


@pytest.fixture(params=COMMANDS, ids=" ".join)
def page(request: pytest.FixtureRequest, pages: Pages) -> Path:
    """The page of one command."""
    return pages(*request.param)


@pytest.fixture
def report(pages: Pages) -> Path:
    """The page of the report."""
    return pages(*REPORT)


def _quiet(chromium: Any) -> list[Any]:
    """What the browser had to complain about."""
    kinds = ("Log.entryAdded", "Runtime.consoleAPICalled", "Runtime.exceptionThrown")
    return [event for kind in kinds for event in chromium.seen(kind)]


@pytest.mark.parametrize(("width", "height"), [DESK, PHONE])
@pytest.mark.parametrize("scheme", ["light", "dark"])
def test_it_asks_for_nothing_complains_of_nothing_and_fits(
    page: Path, width: int, height: int, scheme: str, chromium: Any
) -> None:
    chromium.open(page, width, height, scheme=scheme)
    assert chromium.value("document.documentElement.scrollWidth") <= width
    assert _quiet(chromium) == []
    asked = {event["request"]["url"] for event in chromium.seen("Network.requestWillBeSent")}
    assert asked - {"data:,"} == {page.as_uri()}


def test_the_policy_stops_what_is_not_ours(report: Path, chromium: Any) -> None:
    """The test above can fail: a script and a picture put into the page are refused, and logged."""
    chromium.open(report, *DESK)
    chromium.value(
        "document.body.insertAdjacentHTML('beforeend', '<img src=\"http://127.0.0.1:9/x.png\">');"
        "const s = document.createElement('script'); s.textContent = 'window.ran = 1';"
        "document.body.append(s); undefined"
    )
    assert chromium.value("window.ran") is None
    chromium.value("new Promise((done) => setTimeout(done, 200))")
    assert len(_quiet(chromium)) == 2


SORTED = """(() => {
  const named = (table) => table.caption.textContent.startsWith("ACCEPTED");
  const table = [...document.querySelectorAll("table")].find(named);
  const place = [...table.tHead.rows[0].cells].findIndex((cell) => cell.dataset.key === KEY);
  const head = table.tHead.rows[0].cells[place];
  for (let click = 0; click < CLICKS; click++) head.querySelector("button").click();
  const texts = [...table.tBodies].map((body) => body.rows[0].cells[place].textContent);
  return [head.getAttribute("aria-sort"), texts];
})()"""


def _sorted(chromium: Any, key: str, clicks: int) -> tuple[str | None, list[str]]:
    script = SORTED.replace("KEY", json.dumps(key)).replace("CLICKS", str(clicks))
    direction, texts = chromium.value(script)
    return direction, [text.strip() for text in texts]


@pytest.mark.parametrize(("clicks", "direction"), [(1, "ascending"), (2, "descending"), (3, None)])
def test_a_table_sorts_by_number(clicks: int, direction: str | None, report: Path, chromium: Any) -> None:
    chromium.open(report, *DESK)
    before = _sorted(chromium, "shutoff_match", 0)[1]
    said, after = _sorted(chromium, "shutoff_match", clicks)
    assert said == direction
    wanted = sorted(before, key=float, reverse=clicks == 2) if direction else before
    assert [float(text) for text in after] == [float(text) for text in wanted]
    assert before != wanted or not direction


def test_the_keyboard_sorts_and_the_filter_hides_rows(report: Path, chromium: Any) -> None:
    chromium.open(report, *DESK)
    chromium.value("document.querySelector('table.long th button').focus()")
    for kind in ("keyDown", "keyUp"):
        chromium.send(
            "Input.dispatchKeyEvent",
            type=kind,
            key="Enter",
            code="Enter",
            text="\r",
            windowsVirtualKeyCode=13,
        )
    assert chromium.value("document.querySelector('table.long th').getAttribute('aria-sort')") == "ascending"
    shown = chromium.value("""(() => {
      const input = document.querySelector("input[type=search]");
      input.value = "NIGHT";
      input.dispatchEvent(new Event("input"));
      const table = input.closest("p").nextElementSibling.querySelector("table");
      return [...table.tBodies].filter((body) => body.offsetHeight > 0).map((body) => body.textContent);
    })()""")
    assert shown
    assert all("night" in text for text in shown)


def test_it_is_whole_without_script(report: Path, chromium: Any) -> None:
    chromium.open(report, *DESK, scripts=False)
    text = report.read_text(encoding="utf-8")
    chromium.send("Emulation.setScriptExecutionDisabled", value=False)
    assert chromium.value("document.querySelectorAll('button, input').length") == 0
    assert chromium.value("document.querySelectorAll('main tbody tr').length") == text.count(
        "<tr>"
    ) - text.count("<thead>")
    assert chromium.value("[...document.querySelectorAll('main *')].filter((e) => e.hidden).length") == 0


def test_wide_tables_scroll_in_their_own_place(report: Path, chromium: Any) -> None:
    chromium.open(report, *PHONE)
    wide = chromium.value(
        "[...document.querySelectorAll('.scroll')].filter((e) => e.scrollWidth > e.clientWidth)"
        ".map((e) => [e.tabIndex, getComputedStyle(e).overflowX, e.clientWidth])"
    )
    assert len(wide) > 10
    assert all(tab == 0 and scrolls == "auto" and width <= PHONE[0] for tab, scrolls, width in wide)


def test_the_dark_page_is_dark_and_the_charts_stay_on_paper(report: Path, chromium: Any) -> None:
    look = "[document.body, document.querySelector('.paper')].map((e) => getComputedStyle(e).backgroundColor)"
    chromium.open(report, *DESK, scheme="dark")
    assert chromium.value(look) == ["rgb(21, 24, 28)", "rgb(255, 255, 255)"]
    chromium.open(report, *DESK)
    assert chromium.value(look) == ["rgb(255, 255, 255)"] * 2


@pytest.mark.parametrize("paper", [A4, LETTER], ids=["A4", "Letter"])
def test_it_prints_with_heads_repeated(
    paper: tuple[float, float], report: Path, chromium: Any, tmp_path: Path
) -> None:
    chromium.open(report, *DESK, scheme="dark")
    printed = tmp_path / "report.pdf"
    printed.write_bytes(chromium.printed(*paper))
    assert printed.read_bytes().startswith(b"%PDF-")
    program = shutil.which("pdftotext")
    if program is None:
        pytest.skip("there is no pdftotext here: apt-get install poppler-utils")
    text = subprocess.run(
        [program, "-layout", printed, "-"], capture_output=True, text=True, check=True
    ).stdout
    pages = text.split("\f")[:-1]
    assert 10 < len(pages) < 45
    assert all(f"{number} / {len(pages)}" in page for number, page in enumerate(pages, start=1))
    rejected = [page for page in pages if "min 45.0" in page and "REJECTED, NEAREST" not in page]
    goes_on = [page for page in rejected if "and 1 more" in page]
    assert goes_on  # the table of rejected pumps takes more than a page
    assert all("why not" in page for page in goes_on)
    assert "Show rows with" not in text
    assert "Contents" not in text


def test_nothing_is_cut_off_on_paper(page: Path, chromium: Any) -> None:
    chromium.open(page, int(A4[0] * 96) - 98, 1000)  # the width that its margins leave
    chromium.send("Emulation.setEmulatedMedia", media="print")
    over = chromium.value(
        "[...document.querySelectorAll('table, svg')].map((e) => e.getBoundingClientRect().right)"
        ".filter((right) => right > innerWidth + 1)"
    )
    assert over == []


@pytest.fixture
def axe() -> str:
    """The text of axe-core, a checker of accessibility, where AXE names the file."""
    file = os.environ.get("AXE")
    if not file:
        pytest.skip("AXE names no axe.min.js: npm install axe-core")
    return Path(file).read_text(encoding="utf-8")


@pytest.mark.parametrize(
    ("command", "scheme"), [*zip(COMMANDS, ("light", "dark", "light", "dark"), strict=True)]
)
def test_no_barrier_is_found(
    command: tuple[str, ...], scheme: str, pages: Pages, chromium: Any, axe: str
) -> None:
    chromium.open(pages(*command), *DESK, scheme=scheme)
    chromium.value(f"{axe}; undefined")
    found = chromium.value("axe.run().then((r) => r.violations.map((v) => [v.id, v.help, v.nodes[0].html]))")
    assert found == []
