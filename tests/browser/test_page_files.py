"""What the pages are made of: how large, what may run, where the words are. No browser is needed.

Left out: what they do (the other modules here).
"""

import re
from html.parser import HTMLParser
from pathlib import Path

import httpx
import pytest

from service.web.page_files import without_comments
from tests.browser.module_text import functions, taken_apart
from tests.conftest import ServerProcess

FOLDER = Path(__file__).resolve().parents[2] / "service/web/static/pages"
MODULES = sorted(FOLDER.glob("*.js"))
SHEETS = sorted(FOLDER.glob("*.html"))
MOST_SENT, MOST_WRITTEN = 90_000, 280_000
"""Bytes of all three pages with all they need: as a browser receives them, and as they stand."""
MOST_LINES, MOST_IN_FUNCTION = 300, 40
WORDS = "words.js"
"""Data more than code: as long as there is to say."""

UNSAFE = re.compile(
    r"\b(innerHTML|outerHTML|insertAdjacentHTML|createContextualFragment|setHTMLUnsafe|eval"
    r"|DOMParser|srcdoc)\b|document\.write|new Function|javascript:"
)
_EXPORT = re.compile(r"^export (?:async )?(?:const|function) (\w+)", re.MULTILINE)
# Names of things that are no words: of events, keys, elements, files, fonts, formats.
_KEY = re.compile(
    r"^(Arrow(Left|Right|Up|Down)|Page(Up|Down)|Enter|Escape|Home|End|Tab|Delete|Esc)$"
)
_SENTENCE = re.compile(r"[A-Za-z]{2,} +[a-zA-Z]{2,}")
_CAPITAL = re.compile(r"^[A-Z][a-z]{2,}")
_NO_WORDS = re.compile(
    r"^(\./|/|#|\.|[a-z-]+[.#\[:])|px|system-ui|monospace|^[a-z0-9_-]+( [a-z0-9_-]+)?$|^M[ ]?[\d$-]"
    r"|^use strict$|^(Content|Last|If|Accept|Prefer|Idempotency|Cache)-"
    r"|^[a-z]+/[a-z-]+|\[aria-|^[A-Z][a-z]+Error$"
)


def test_all_pages_together_are_small(demo: ServerProcess) -> None:
    files = [file for file in FOLDER.iterdir() if file.suffix in (".js", ".css")]
    pages = ["/", "/arms/housing-loader", "/arms/housing-loader/reach"]
    asked = [*pages, *(f"/pages/{file.name}" for file in files)]
    sent = {}
    with httpx.Client(base_url=demo.url, headers={"Accept-Encoding": "gzip"}) as client:
        for path in asked:
            with client.stream("GET", path) as answer:
                assert answer.status_code == 200, path
                sent[path] = len(b"".join(answer.iter_raw()))
    assert sum(sent.values()) <= MOST_SENT, sent
    assert sum(file.stat().st_size for file in [*files, *SHEETS]) <= MOST_WRITTEN


@pytest.mark.parametrize("file", MODULES, ids=lambda file: file.name)
def test_modules_are_small_and_say_what_they_are(file: Path) -> None:
    text = file.read_text(encoding="utf-8")
    assert text.startswith(("//", "/*")), "a module begins with its idea and what it leaves out"
    assert file.name == WORDS or text.count("\n") <= MOST_LINES
    long = {
        name: n for name, n in functions(taken_apart(text).code).items() if n > MOST_IN_FUNCTION
    }
    assert long == {}


@pytest.mark.parametrize("file", MODULES, ids=lambda file: file.name)
def test_nothing_but_comments_is_left_out_of_what_is_sent(file: Path) -> None:
    text = file.read_text(encoding="utf-8")
    sent = without_comments(text)
    assert len(sent) < len(text)
    before, after = taken_apart(text), taken_apart(sent)
    assert after.literals == before.literals
    lines = [[line.rstrip() for line in one.code.split("\n")] for one in (before, after)]
    assert lines[0] == lines[1]


@pytest.mark.parametrize("file", sorted(FOLDER.glob("*.css")), ids=lambda file: file.name)
def test_rules_are_sent_whole(file: Path) -> None:
    text = file.read_text(encoding="utf-8")
    before, after = (
        re.sub(r"/\*.*?\*/", "", one, flags=re.DOTALL).split()
        for one in (text, without_comments(text))
    )
    assert after == before


def test_the_modules_were_found() -> None:
    assert len(MODULES) >= 10
    assert len(SHEETS) >= 3


def test_what_a_module_gives_is_taken() -> None:
    """By another module, or by a test that asks the module itself."""
    texts = {file.name: file.read_text(encoding="utf-8") for file in MODULES}
    asked = Path(__file__).with_name("test_modules.py").read_text(encoding="utf-8")
    found, unused = 0, []
    for file, text in texts.items():
        for name in _EXPORT.findall(text):
            found += 1
            taking = re.compile(rf'import {{[^}}]*\b{name}\b[^}}]*}} from "\./{file}"')
            others = (other for module, other in texts.items() if module != file)
            if f"all.{name}(" not in asked and not any(map(taking.search, others)):
                unused.append(f"{file}: {name}")
    assert found > 40
    assert unused == []


def test_styles_are_of_something_that_is_there() -> None:
    """Each class and id of a style sheet stands in a page, a module or the code of pages."""
    web = [file for file in FOLDER.parents[1].rglob("*") if file.suffix in (".py", ".js", ".html")]
    written = "\n".join(file.read_text(encoding="utf-8") for file in web)
    put_together = tuple(f"{part}-" for part in re.findall(r"`([a-z]+)-\$\{", written))
    names = set()
    for file in FOLDER.glob("*.css"):
        rules = re.sub(r"/\*.*?\*/", "", file.read_text(encoding="utf-8"), flags=re.DOTALL)
        for selector in re.findall(r"([^{}]+)\{", rules):
            names.update(re.findall(r"[.#]([a-z][a-z_-]+)", selector))
    assert len(names) > 50
    unknown = {name for name in names if not name.startswith(put_together)}
    unused = [one for one in unknown if not re.search(rf"(?<![\w-]){one}(?![\w-])", written)]
    assert unused == []


@pytest.mark.parametrize("file", MODULES, ids=lambda file: file.name)
def test_nothing_becomes_markup(file: Path) -> None:
    taken = taken_apart(file.read_text(encoding="utf-8"))
    assert UNSAFE.findall(taken.code) == []
    assert [one for one in taken.literals if UNSAFE.search(one[1])] == []
    hosts = [one for one in taken.literals if re.search(r"https?://|^//", one[1])]
    assert [one for one in hosts if one[1] != "http://www.w3.org/2000/svg"] == []


@pytest.mark.parametrize(
    "file", [file for file in MODULES if file.name != "words.js"], ids=lambda file: file.name
)
def test_words_stand_in_one_file(file: Path) -> None:
    found = []
    for line, literal in taken_apart(file.read_text(encoding="utf-8")).literals:
        said = re.sub(r"\$\{[^}]*\}", " ", literal).strip()
        if _KEY.match(said) or _NO_WORDS.search(said):
            continue
        if _SENTENCE.search(said) or _CAPITAL.match(said):
            found.append(f"{file.name}:{line}: {literal}")
    assert found == []


class Markup(HTMLParser):
    """What a page's markup has that its policy would refuse, and where it leads."""

    def __init__(self) -> None:
        super().__init__()
        self.refused: list[str] = []
        self.addresses: list[str] = []
        self._script = False

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        given = dict(attrs)
        self.refused += [f"{tag} {name}" for name in given if name == "style" or name[:2] == "on"]
        if tag == "style":
            self.refused.append(tag)
        self._script = tag == "script" and "src" not in given
        self.addresses += [given[name] or "" for name in ("src", "href", "action") if name in given]

    def handle_data(self, data: str) -> None:
        if self._script and data.strip():
            self.refused.append("script within the page")
            self._script = False


@pytest.mark.parametrize("file", SHEETS, ids=lambda file: file.name)
def test_markup_keeps_to_its_policy(file: Path) -> None:
    markup = Markup()
    markup.feed(file.read_text(encoding="utf-8"))
    assert markup.refused == []
    assert [one for one in markup.addresses if re.match(r"[a-z]+:|//", one)] == []


def test_the_parser_of_markup_sees_what_it_should() -> None:
    markup = Markup()
    markup.feed("<p style='a' onclick='b'>x<script>c()</script><style></style><a href='//d'>")
    assert markup.refused == ["p style", "p onclick", "script within the page", "style"]
    assert markup.addresses == ["//d"]


@pytest.mark.parametrize("path", ["/", "/arms/housing-loader", "/arms/housing-loader/reach"])
def test_pages_carry_a_strict_policy(demo: ServerProcess, path: str) -> None:
    answer = httpx.get(demo.url + path)
    assert answer.status_code == 200
    assert answer.headers["content-type"] == "text/html; charset=utf-8"
    policy = dict(
        part.strip().split(" ", 1) for part in answer.headers["content-security-policy"].split(";")
    )
    assert policy == {
        "default-src": "'none'",
        "script-src": "'self'",
        "style-src": "'self'",
        "img-src": "'self' data: blob:",
        "connect-src": "'self'",
        "base-uri": "'none'",
        "form-action": "'self'",
        "frame-ancestors": "'none'",
    }
    assert answer.headers["cache-control"] == "no-cache"
    again = httpx.get(demo.url + path, headers={"If-None-Match": answer.headers["etag"]})
    assert (again.status_code, again.content) == (304, b"")
    assert again.headers["content-security-policy"] == answer.headers["content-security-policy"]


def test_files_of_pages_are_served_and_no_others(demo: ServerProcess) -> None:
    kinds = {".js": "text/javascript", ".css": "text/css", ".svg": "image/svg+xml"}
    served = [file for file in FOLDER.iterdir() if file.suffix in kinds]
    assert served
    with httpx.Client(base_url=f"{demo.url}/pages/") as client:
        for file in served:
            answer = client.get(file.name)
            assert answer.content == without_comments(file.read_text(encoding="utf-8")).encode()
            assert answer.headers["content-type"].split(";")[0] == kinds[file.suffix]
            assert answer.headers["x-content-type-options"] == "nosniff"
        for name in ("__init__.py", "..%2f__init__.py", "%2e%2e/pages.py", "board", "none.js"):
            assert client.get(name).status_code == 404
