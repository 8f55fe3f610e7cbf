"""A cluster as a small graph: its members as drawn diagrams, joined where boxes are exchanged.

Members stand on a circle (two of them beside each other), so that no line runs through a third. They are put in an
order in which neighbours differ by as few boxes as a greedy walk finds, which keeps the lines short.
"""

from __future__ import annotations

import math
from collections.abc import Sequence

from ratomega.desk.diagram_pictures import configuration_words, diagrams_picture
from ratomega.desk.markup import Child, element, joined
from ratomega.desk.picture import PAPER, Picture, label
from ratomega.detector.poincare import polynomial_text
from ratomega.results.detections import ClusterReport, Exchange

__all__ = ["MOST_MEMBERS", "cluster_picture", "cluster_words", "exchange_words"]

# A circle of more diagrams is too small to be read; of a larger cluster the first members are drawn beside each other.
MOST_MEMBERS = 12
CELL = 13.0
PADDING = 7.0


def cluster_picture(cluster: ClusterReport, names: Sequence[str] = ()) -> Picture:
    """The cluster drawn. Lines need ``exchanges``; a cluster of more than ``MOST_MEMBERS`` shows the first of them."""
    shown = cluster.members[:MOST_MEMBERS]
    whole = len(shown) == len(cluster.members)
    order = _order(cluster) if whole else list(range(len(shown)))
    cards = {n: _card(diagrams_picture(cluster.members[n], names=names, cell=CELL), n) for n in order}
    centres, width, height = _places([cards[n] for n in order])
    place = dict(zip(order, centres, strict=True))
    parts: list[Child] = []
    if whole:
        for exchange in cluster.exchanges or ():
            (x1, y1), (x2, y2) = (place[n] for n in exchange.members)
            line = element("line", element("title", exchange_words(exchange, cluster)), x1=x1, y1=y1, x2=x2, y2=y2,
                           stroke="currentColor", stroke_width=1.6, class_="exchange")
            parts.append(line)
    for n in order:
        x, y = place[n]
        parts.append(cards[n].at(x - cards[n].width / 2, y - cards[n].height / 2))
    return Picture(joined(*parts), width, height, cluster_words(cluster, names))


def _card(picture: Picture, number: int) -> Picture:
    """A member on a card of its own, which covers the ends of the lines, with its number."""
    width, height = picture.width + 2 * PADDING + 8, picture.height + 2 * PADDING
    card = element("rect", x=0.5, y=0.5, width=width - 1, height=height - 1, rx=6, fill=PAPER,
                   stroke="currentColor", stroke_opacity=0.45, class_="card")
    name = label(str(number), width - 8, 12, size=10, class_="number")
    return Picture(joined(card, name, picture.at(PADDING, PADDING)), width, height, "")


def _order(cluster: ClusterReport) -> list[int]:
    """Members along a greedy walk: next comes the one that is fewest boxes away, joined ones first."""
    distance = {frozenset(e.members): len(e.leaves) for e in cluster.exchanges or ()}
    far = 1 + max(distance.values(), default=0)
    left = list(range(1, len(cluster.members)))
    walk = [0]
    while left:
        here = walk[-1]
        nearest = min(left, key=lambda n: (distance.get(frozenset((here, n)), far), n))
        left.remove(nearest)
        walk.append(nearest)
    return walk


def _places(cards: Sequence[Picture]) -> tuple[list[tuple[float, float]], float, float]:
    """The centres of the cards, and the size of all."""
    wide = max(card.width for card in cards)
    high = max(card.height for card in cards)
    number = len(cards)
    if number <= 2:
        gap = 46.0
        return [(wide / 2 + n * (wide + gap), high / 2) for n in range(number)], number * (wide + gap) - gap, high
    # Neighbours on the circle are a diagonal and a bit apart.
    apart = math.hypot(wide, high) * 1.02 + 12
    radius = apart / (2 * math.sin(math.pi / number))
    angles = [2 * math.pi * n / number - math.pi / 2 for n in range(number)]
    raw = [(radius * math.cos(angle), radius * math.sin(angle)) for angle in angles]
    left, top = min(x for x, _ in raw), min(y for _, y in raw)
    right, bottom = max(x for x, _ in raw), max(y for _, y in raw)
    centres = [(x - left + wide / 2, y - top + high / 2) for x, y in raw]
    return centres, right - left + wide, bottom - top + high


def cluster_words(cluster: ClusterReport, names: Sequence[str] = ()) -> str:
    """The cluster in words: its figures, its first members, what is exchanged."""
    text = f"cluster of order {cluster.order}, {cluster.size} members, dimension {cluster.dimension}"
    if cluster.poincare is not None:
        text += f", Poincaré polynomial {polynomial_text(cluster.poincare)}"
    members = "; ".join(
        f"{n}: {configuration_words(m, names=names)}" for n, m in enumerate(cluster.members[:MOST_MEMBERS])
    )
    rest = cluster.size - MOST_MEMBERS
    text += f". Members {members}" + (f"; and {rest} more" if rest > 0 else "")
    if cluster.exchanges and cluster.size <= MOST_MEMBERS:
        text += ". Joined: " + ", ".join(f"{e.members[0]} with {e.members[1]}" for e in cluster.exchanges)
    return text


def exchange_words(exchange: Exchange, cluster: ClusterReport) -> str:
    """Which boxes make one member from the other."""
    several, colours = len(cluster.members[0]) > 1, any(len(node) > 1 for node in cluster.members[0])

    def boxes(places: Sequence[tuple[int, int, int, int]]) -> str:
        return ", ".join(
            f"({i},{j})" + (f" of colour {c}" if colours else "") + (f" of node {v}" if several else "")
            for v, c, i, j in places
        )

    first, second = exchange.members
    return f"from {first} to {second}: box {boxes(exchange.leaves)} goes, {boxes(exchange.enters)} comes"


