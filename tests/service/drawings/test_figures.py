"""Letters of directions stand beside their arrows, on no words, on no boundary if that can be."""

import numpy as np
import pytest

from service.drawings.figures import _letter
from service.drawings.lettering import NORMAL
from service.drawings.paper import Line, Paper, Piece

TIP = (50.0, 50.0)
AROUND = [(x, y) for x in (46.0, 50.0, 54.0) for y in (48.0, 51.0, 54.0)]


@pytest.mark.parametrize("way", [(1.0, 0.0), (0.0, -1.0)])
@pytest.mark.parametrize("taken", AROUND)
@pytest.mark.parametrize("bounded", [False, True])
def test_a_letter_stands_on_no_words(
    way: tuple[float, float], taken: tuple[float, float], bounded: bool
) -> None:
    paper = Paper(100.0, 100.0)
    paper.write(taken, "B", NORMAL)
    if bounded:  # wherever it stands, a boundary runs through it
        rows = [np.array([[40.0, y], [60.0, y]]) for y in np.arange(44.0, 57.0, 0.4)]
        paper.boundary([Piece(row, closed=False) for row in rows], Line.WIDE, "all over")
    _letter(paper, TIP, way, "z")
    first, letter = paper.words
    assert not letter.meets(first)
