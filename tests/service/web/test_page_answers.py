"""How pages are answered: by their content's digest, and compressed for who takes that."""

import gzip

import pytest
from starlette.requests import Request

from service.web.page_answers import page_answer

PAGE = b"<p>" + b"quiet " * 200 + b"</p>"


def asked(**headers: str) -> Request:
    named = [(name.replace("_", "-").encode(), value.encode()) for name, value in headers.items()]
    return Request({"type": "http", "method": "GET", "path": "/", "headers": named})


@pytest.mark.parametrize(
    ("accepted", "compressed"),
    [
        ("gzip", True),
        ("br, GZIP;q=0.5", True),
        ("deflate, gzip ; q=1", True),
        ("gzip;q=0", False),
        ("gzip; q=0.000", False),
        ("identity", False),
        ("gzipped", False),
        ("", False),
    ],
)
def test_compressed_for_who_takes_it(accepted: str, compressed: bool) -> None:
    answer = page_answer(asked(accept_encoding=accepted), PAGE, "text/html")
    assert answer.headers["vary"] == "Accept-Encoding"
    assert ("content-encoding" in answer.headers) == compressed
    assert (gzip.decompress(answer.body) if compressed else answer.body) == PAGE
    assert int(answer.headers["content-length"]) == len(answer.body)


def test_what_is_known_is_not_sent_again_in_the_same_coding() -> None:
    plain = page_answer(asked(), PAGE, "text/html").headers["etag"]
    packed = page_answer(asked(accept_encoding="gzip"), PAGE, "text/html").headers["etag"]
    assert plain != packed
    for coding, tag, status in (
        ("", plain, 304),
        ("", packed, 200),
        ("gzip", packed, 304),
        ("gzip", plain, 200),
        ("gzip", "*", 304),
    ):
        answer = page_answer(
            asked(accept_encoding=coding, if_none_match=tag), PAGE, "text/html", {"X-Kept": "1"}
        )
        assert answer.status_code == status
        assert answer.headers["x-kept"] == "1"
        assert answer.headers["cache-control"] == "no-cache"


def test_a_page_that_is_not_there_is_told_whole() -> None:
    answer = page_answer(asked(if_none_match="*"), PAGE, "text/html", status=404)
    assert (answer.status_code, answer.body) == (404, PAGE)
