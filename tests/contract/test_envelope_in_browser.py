"""A drawn envelope in a real browser: hostile names stay words, and nothing is asked for.

Left out: looks. Skipped where no chromium is installed.
"""

from pathlib import Path

import pytest

from service.convert import UNITS
from service.drawings.envelope_sheet import envelope_sheet
from service.drawings.envelope_words import SheetLabels
from tests.contract.test_docs_page import BROWSER, look
from tests.service.drawings.sheets import envelopes

pytestmark = pytest.mark.skipif(BROWSER is None, reason="no chromium is installed here")

HOSTILE = (
    "<script>document.documentElement.remove()</script>"
    '"><image href="http://192.0.2.1/x.png" onerror="console.log(1)"/>'
)


def test_hostile_names_stay_words(tmp_path: Path) -> None:
    labels = SheetLabels(*[HOSTILE] * 6, cautions=[HOSTILE])
    file = tmp_path / "sheet.svg"
    file.write_bytes(envelope_sheet(envelopes("level"), labels, UNITS["mm-deg"]))
    shown, asked, console = look(file.as_uri(), tmp_path)
    assert "SECTION A" in shown
    assert shown.count("&lt;script&gt;") >= 3
    assert "<script" not in shown
    assert "<image" not in shown
    assert not [address for address in asked if not address.startswith("file:")]
    assert console == []
