"""The nearest and the farthest of level links, held against all postures, and against triangles."""

import numpy as np
import pytest
from scipy.optimize import minimize

from kinematics.envelope.level_links import MOST_LINKS, LevelLinks
from tests.kinematics.inverse.seeds import fresh

GRID = {1: 4001, 2: 161, 3: 33}
"""Places along each joint's travel that are looked at before the best of them are polished."""

# What makes corners: equal links that fold back on themselves, links of no length, travel that
# ends where links are in line, that has no width, and that is more than a turn.
LENGTHS = (0.0, 0.2, 0.3, 0.3, 0.5)
BEGINS = (-np.pi, -0.5 * np.pi, -0.3, 0.0, 2.0)
WIDTHS = (0.0, 0.2, 0.5 * np.pi, np.pi, 2.0 * np.pi, 9.0)


def awkward(random: np.random.Generator, joints: int) -> LevelLinks:
    steps = np.zeros((joints + 1, 2))
    steps[:, 0] = random.choice(LENGTHS, joints + 1)
    lower = random.choice(BEGINS, joints)
    return LevelLinks(steps, lower, lower + random.choice(WIDTHS, joints))


def any_links(random: np.random.Generator, joints: int) -> LevelLinks:
    lower = random.uniform(-3.0, 3.0, joints)
    upper = lower + random.uniform(0.0, 6.5, joints)
    return LevelLinks(random.normal(size=(joints + 1, 2)), lower, upper)


def by_all_postures(links: LevelLinks) -> tuple[float, float]:
    """Return the least and greatest radius of a grid of postures, its best ones polished."""
    joints = len(links.lower)
    ways = [np.linspace(*ends, GRID[joints]) for ends in zip(links.lower, links.upper, strict=True)]
    grid = np.stack(np.meshgrid(*ways, indexing="ij"), axis=-1).reshape(-1, joints)
    radii = links.radii(grid)
    found = [float(radii.min()), float(radii.max())]
    bounds = list(zip(links.lower, links.upper, strict=True))
    order = np.argsort(radii)
    for end, sign, starts in ((0, 1.0, order[:3]), (1, -1.0, order[-3:])):
        for start in grid[starts]:

            def squared(angles: np.ndarray, sign: float = sign) -> float:
                return sign * float(links.radii(angles[None])[0]) ** 2

            polished = minimize(squared, start, bounds=bounds, method="L-BFGS-B", tol=1e-15).x
            radius = float(links.radii(polished[None])[0])
            found[end] = min(found[end], radius) if end == 0 else max(found[end], radius)
    return found[0], found[1]


@pytest.mark.parametrize("draw", [awkward, any_links])
@pytest.mark.parametrize("joints", [1, 2, 3])
def test_no_posture_is_nearer_or_farther(draw: object, joints: int) -> None:
    random = fresh()
    for _ in range(24 if joints < 3 else 8):
        links: LevelLinks = draw(random, joints)  # type: ignore[operator]
        angles = links.nearest_and_farthest()
        assert (links.lower <= angles).all()
        assert (angles <= links.upper).all()
        least, greatest = links.radii(angles)
        near, far = by_all_postures(links)
        assert least <= near + 1e-12, links
        assert greatest >= far - 1e-12, links
        # And both are reached, so they are no farther out than the best found but for polishing.
        assert least >= near - 1e-6, links
        assert greatest <= far + 1e-6, links


@pytest.mark.parametrize("joints", range(1, MOST_LINKS + 1))
def test_links_that_close_come_back_to_axis_1(joints: int) -> None:
    """A posture that closes is made first, then travel around it, of no width for most joints."""
    random = fresh()
    for _ in range(30):
        angles = random.uniform(-3.0, 3.0, joints)
        steps = random.normal(size=(joints + 1, 2))
        # The first step leads back from where the others end.
        steps[0] = 0.0
        steps[0] = -LevelLinks(steps, angles, angles).places(angles[None])[0]
        width = random.choice([0.0, 0.05, 0.4, 2.0], (2, joints))
        links = LevelLinks(steps, angles - width[0], angles + width[1])
        assert links.radii(links.nearest_and_farthest())[0] < 1e-12 * np.abs(steps).sum()


def test_a_gap_that_no_posture_closes_is_told() -> None:
    """The middle link is longer than the others together: nothing comes nearer than that."""
    wide = np.full(2, np.pi)
    links = LevelLinks(np.array([[0.2, 0.0], [0.9, 0.0], [0.3, 0.0]]), -wide, wide)
    found = links.radii(links.nearest_and_farthest())
    np.testing.assert_allclose(found, [0.4, 1.4], atol=1e-15)


def test_an_elbow_that_opens_to_a_square_at_most() -> None:
    """Laws of cosines at both ends of its travel."""
    links = LevelLinks(np.array([[0.4, 0.0], [0.3, 0.0]]), np.array([0.5]), np.array([2.0]))
    ends = [np.sqrt(0.25 + 0.24 * np.cos(turned)) for turned in (2.0, 0.5)]
    np.testing.assert_allclose(links.radii(links.nearest_and_farthest()), ends, atol=1e-15)
