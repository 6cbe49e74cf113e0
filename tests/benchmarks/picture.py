"""Charts with two logarithmic axes, side by side in one SVG; lines are told apart by pattern."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from math import ceil, floor, log10

WIDTH, HEIGHT, MARGIN = 460, 320, 56
DASHES = ("", "8 4", "2 4")
STYLE = (
    "text{font:12px sans-serif;fill:#222}line{stroke:#bbb}"
    "polyline{fill:none;stroke:#222;stroke-width:2}"
)


@dataclass(frozen=True)
class Chart:
    """Values over steps: one line for each name."""

    title: str
    across: str
    steps: Sequence[float]
    lines: Mapping[str, Sequence[float]]
    left: float = MARGIN

    @property
    def powers(self) -> range:
        """Powers of ten that the values lie between."""
        every = [value for values in self.lines.values() for value in values]
        return range(floor(log10(min(every))), ceil(log10(max(every))) + 1)

    def at(self, step: float, value: float) -> tuple[float, float]:
        """Return the place of a value in the picture."""
        first, last = log10(self.steps[0]), log10(self.steps[-1])
        low, high = self.powers[0], self.powers[-1]
        x = self.left + (log10(step) - first) / (last - first) * (WIDTH - 2 * MARGIN)
        y = MARGIN + (high - log10(value)) / (high - low) * (HEIGHT - 2 * MARGIN)
        return x, y

    def svg(self) -> str:
        """Return the chart as elements of an SVG."""
        parts = [
            f'<text x="{self.left}" y="24" font-weight="bold">{self.title}</text>',
            f'<text x="{self.left}" y="{HEIGHT - 8}">{self.across}</text>',
        ]
        right = self.left + WIDTH - 2 * MARGIN
        for power in self.powers:
            x, y = self.at(self.steps[0], 10.0**power)
            parts.append(f'<line x1="{x:.1f}" y1="{y:.1f}" x2="{right}" y2="{y:.1f}"/>')
            label = f"{10.0**power:g}"
            parts.append(f'<text x="{x - 6:.1f}" y="{y:.1f}" text-anchor="end">{label}</text>')
        for step in self.steps:
            x, y = self.at(step, 10.0 ** self.powers[0])
            parts.append(f'<text x="{x:.1f}" y="{y + 16:.1f}" text-anchor="middle">{step:g}</text>')
        for dash, (name, values) in zip(DASHES, self.lines.items(), strict=False):
            places = [self.at(*pair) for pair in zip(self.steps, values, strict=True)]
            points = " ".join(f"{x:.1f},{y:.1f}" for x, y in places)
            parts.append(f'<polyline points="{points}" stroke-dasharray="{dash}"/>')
            x, y = places[-1]
            parts.append(f'<text x="{x:.1f}" y="{y - 6:.1f}" text-anchor="end">{name}</text>')
        return "".join(parts)


def picture(charts: Sequence[Chart]) -> str:
    """Return the charts as one SVG."""
    placed = [
        Chart(chart.title, chart.across, chart.steps, chart.lines, place * WIDTH + MARGIN)
        for place, chart in enumerate(charts)
    ]
    size = f'width="{WIDTH * len(charts)}" height="{HEIGHT}"'
    return (
        f'<svg xmlns="http://www.w3.org/2000/svg" {size}><style>{STYLE}</style>'
        f'<rect {size} fill="#fff"/>{"".join(chart.svg() for chart in placed)}</svg>\n'
    )
