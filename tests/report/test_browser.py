"""The report as a browser shows it: the demo reports and one of hostile names, in a headless Chromium.

Skipped where no Chromium is installed; the gate installs one where it may.
"""

import html
import json
import re
import shutil
import subprocess
from collections.abc import Callable
from html.parser import HTMLParser
from pathlib import Path

import pytest

from fieldfit import Book, read_book, reconcile
from tests.demos import DATASETS, DEMOS

BROWSER = shutil.which("chromium") or shutil.which("chromium-browser") or shutil.which("google-chrome")
pytestmark = pytest.mark.skipif(BROWSER is None, reason="no Chromium installed (apt-get install chromium)")

QUIET = ("background-networking", "component-update", "sync", "gpu", "extensions", "default-apps", "domain-reliability")
HOSTILE = '<img src=x onerror="document.title=1">'


class Page(HTMLParser):
    """What stands in a page after its script has run: texts, pictures and what they are called, references."""

    def __init__(self, text: str) -> None:
        super().__init__()
        self.texts: list[str] = []
        self.open: list[str] = []
        self.pictures: list[dict[str, str]] = []
        self.references: list[str] = []
        self.tags: list[str] = []
        self.feed(text)

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        given = {name: value or "" for name, value in attrs}
        self.tags.append(tag)
        self.references += [given[name] for name in ("src", "href") if name in given]
        if tag == "svg":
            self.pictures.append({"role": given.get("role", "")})
        if tag not in ("meta", "link", "br", "input", "img"):
            self.open.append(tag)
        if tag == "img":
            self.pictures.append({"role": "img", "title": given.get("alt", "")})

    def handle_endtag(self, tag: str) -> None:
        while self.open and self.open.pop() != tag:
            pass

    def handle_data(self, data: str) -> None:
        inside = self.open[-1] if self.open else ""
        if inside in ("title", "desc") and "svg" in self.open:
            self.pictures[-1][inside] = data
        elif inside not in ("style", "script"):
            self.texts.append(data)


@pytest.fixture(scope="module")
def shown(tmp_path_factory: pytest.TempPathFactory) -> Callable[[Path], tuple[Page, str, list[str]]]:
    """Open a page; what stands in it, what its console said, and the addresses it asked for."""

    def show(page: Path) -> tuple[Page, str, list[str]]:
        profile = tmp_path_factory.mktemp("profile")
        log = profile / "net.json"
        options = [f"--disable-{part}" for part in QUIET]
        options += ["--headless", "--no-sandbox", "--no-first-run", "--enable-logging=stderr", f"--log-net-log={log}"]
        command = [str(BROWSER), *options, f"--user-data-dir={profile}", "--virtual-time-budget=3000", "--dump-dom"]
        done = subprocess.run([*command, page.as_uri()], capture_output=True, text=True, timeout=120, check=True)
        said = "\n".join(line for line in done.stderr.splitlines() if "CONSOLE" in line)
        return Page(done.stdout), said, asked_for(log)

    return show


def asked_for(log: Path) -> list[str]:
    """Addresses of the requests in the browser's log that a page made; those of the browser itself have no origin."""
    record = json.loads(log.read_text(encoding="utf-8"))
    start = record["constants"]["logEventTypes"]["URL_REQUEST_START_JOB"]
    events = [event.get("params", {}) for event in record["events"] if event["type"] == start]
    return [event["url"] for event in events if "url" in event and event["initiator"] != "not an origin"]


@pytest.fixture(scope="module", params=DEMOS)
def demo(request: pytest.FixtureRequest, tmp_path_factory: pytest.TempPathFactory) -> tuple[Path, str]:
    findings = reconcile(read_book(DATASETS / request.param / DEMOS[request.param]))
    page = findings.write(tmp_path_factory.mktemp("out") / "report")
    words = page.read_text(encoding="utf-8")
    return page, re.search(r'class="lead">([^<]+)<', words)[1]  # type: ignore[index]


def test_a_demo_report_shows_its_answer_and_asks_for_nothing(
    demo: tuple[Path, str], shown: Callable[[Path], tuple[Page, str, list[str]]]
) -> None:
    path, headline = demo
    page, said, asked = shown(path)
    assert said == ""
    assert [address for address in asked if not address.startswith(("file:", "data:"))] == []
    assert [address for address in page.references if not address.startswith(("#", "data:"))] == []
    assert headline in page.texts
    assert page.pictures
    for picture in page.pictures:
        assert picture["role"] == "img"
        assert picture["title"]
        assert picture["desc"]


def test_the_script_adds_sorting_and_hiding(
    demo: tuple[Path, str], shown: Callable[[Path], tuple[Page, str, list[str]]]
) -> None:
    path, _ = demo
    before, (after, _, _) = Page(path.read_text(encoding="utf-8")), shown(path)
    assert "button" not in before.tags
    assert after.tags.count("button") == 6  # a column each
    assert [text for text in after.texts if text.strip()] == [text for text in before.texts if text.strip()]


#: A page in a frame as wide as a phone, and how far it and its figures stand out of it; a table may scroll by itself.
PHONE = """<p>-</p><iframe id=page style="width:390px; height:800px" srcdoc="{page}"></iframe><script>
const frame = document.getElementById("page")
frame.onload = () => {{
  const root = frame.contentDocument.documentElement
  const figures = [...root.querySelectorAll("svg, h1, h2, h3, p, li")].map(each => each.getBoundingClientRect().right)
  document.querySelector("p").textContent = Math.max(root.scrollWidth, ...figures) - root.clientWidth
}}
</script>"""


def test_a_phone_shows_the_page_whole(
    demo: tuple[Path, str], tmp_path: Path, shown: Callable[[Path], tuple[Page, str, list[str]]]
) -> None:
    framed = tmp_path / "phone.html"
    framed.write_text(PHONE.format(page=html.escape(demo[0].read_text(encoding="utf-8"))), encoding="utf-8")
    page, said, _ = shown(framed)
    assert said == ""
    assert float(page.texts[0]) <= 0


def test_a_page_that_asks_for_something_would_be_caught(
    tmp_path: Path, shown: Callable[[Path], tuple[Page, str, list[str]]]
) -> None:
    page = tmp_path / "asking.html"
    page.write_text('<img src="http://127.0.0.1:9/x.png" alt=""><script>console.error("no")</script>')
    _, said, asked = shown(page)
    assert "no" in said
    assert asked == ["http://127.0.0.1:9/x.png"]


def test_hostile_names_show_as_text(
    book_of: Callable[..., Book], tmp_path: Path, shown: Callable[[Path], tuple[Page, str, list[str]]]
) -> None:
    book = book_of(
        members=[["member", "length [m]", "EI [kN m2]", "tolerance [%]"], [HOSTILE, 6.0, 20000, 10]],
        loads=[["member", "load case", "from [m]", "force [kN]"], [HOSTILE, HOSTILE, 3.0, 50]],
        readings=[["member", "stage", "at [m]", "deflection [mm]", "u [mm]"], [HOSTILE, HOSTILE, 3.0, 11.0, 0.1]],
    )
    page, said, _ = shown(reconcile(book).write(tmp_path / "out"))
    assert said == ""
    assert HOSTILE in "".join(page.texts)
    assert not [picture for picture in page.pictures if "desc" not in picture]  # no picture but the report's own
