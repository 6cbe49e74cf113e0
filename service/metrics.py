"""Counts and times of requests, by route template, for a Prometheus scraper.

Left out: several server processes, whose numbers would have to be added up.
"""

from time import monotonic

from prometheus_client import CollectorRegistry, Counter, Gauge, Histogram, generate_latest

MEDIA_TYPE = "text/plain; version=0.0.4; charset=utf-8"
# A pose takes a fraction of a millisecond, a bulk table seconds.
_BUCKETS_S = (0.0005, 0.001, 0.002, 0.005, 0.01, 0.02, 0.05, 0.1, 0.5, 1.0, 5.0)
_NOT_WAITED_FOR = ("/v1/surveys", "/livez", "/readyz", "/metrics")
"""Beginnings of routes that nobody asks at the speed of a line."""

_LATELY_S = 1.0

_METHODS = frozenset({"GET", "HEAD", "POST", "PUT", "DELETE", "PATCH", "OPTIONS"})


class Metrics:
    """The numbers of one app, in a registry of its own so that two apps do not add up."""

    def __init__(self) -> None:
        self.registry = CollectorRegistry()
        self._requests = Counter(
            "armspan_requests",
            "Answers given.",
            ("route", "method", "status"),
            registry=self.registry,
        )
        self._seconds = Histogram(
            "armspan_request_seconds",
            "Time from request to the end of the answer.",
            ("route", "method"),
            buckets=_BUCKETS_S,
            registry=self.registry,
        )
        self.open_requests = Gauge(
            "armspan_open_requests", "Requests being answered.", registry=self.registry
        )
        self._asked_at = float("-inf")

    def answered(self, route: str, method: str, status: int, seconds: float) -> None:
        """Count one answer; ``route`` is the template, so that names do not make new series."""
        known = method if method in _METHODS else "other"
        self._requests.labels(route, known, str(status)).inc()
        self._seconds.labels(route, known).observe(seconds)
        if not route.startswith(_NOT_WAITED_FOR):
            self._asked_at = monotonic()

    def is_asked(self) -> bool:
        """Return whether a question that somebody waits on was answered a short while ago."""
        return monotonic() - self._asked_at <= _LATELY_S

    def text(self) -> bytes:
        """Return the text exposition format, version 0.0.4."""
        return generate_latest(self.registry)
