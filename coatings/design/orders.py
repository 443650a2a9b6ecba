"""Orders of films that a run allows: no two neighbours alike, first and last as asked.

The number of orders is counted exactly, by the number of ways in which an order can be completed from
each film. Few are all listed; from many some are drawn, every order as likely as any other.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np

from coatings.facets import IntArray

Order = tuple[int, ...]


@dataclass(frozen=True)
class Orders:
    """Orders of ``count`` layers of the films of ``palette``; ``first`` and ``last`` film or None."""

    palette: tuple[int, ...]
    count: int
    first: int | None = None
    last: int | None = None

    def number(self) -> int:
        """How many orders there are."""
        return sum(self._ways()[0].values())

    def every(self) -> Iterator[Order]:
        """All orders, by film number."""
        ways = self._ways()
        unfinished: list[Order] = [()]
        while unfinished:
            order = unfinished.pop()
            if len(order) == self.count:
                yield order
                continue
            allowed = self._next(order, ways)
            unfinished += [(*order, film) for film in reversed(allowed)]

    def in_turn(self) -> list[Order]:
        """Orders in which two films take turns: mirrors."""
        pairs = [(a, b) for a in self.palette for b in self.palette if a != b]
        orders = [tuple(pair[i % 2] for i in range(self.count)) for pair in pairs]
        return [
            order
            for order in dict.fromkeys(orders)
            if self.first in (None, order[0]) and self.last in (None, order[-1])
        ]

    def some(self, most: int, generator: np.random.Generator) -> list[Order]:
        """At most ``most`` orders: all where there are no more, else those with two films in turn and
        others by chance."""
        if self.number() <= most:
            return list(self.every())
        ways = self._ways()
        kept = dict.fromkeys(self.in_turn()[:most])
        for _ in range(20 * most):
            if len(kept) == most:
                break
            kept[self._drawn(ways, generator)] = None
        return list(kept)

    def _ways(self) -> list[dict[int, int]]:
        """For each place the number of ways to complete an order from each film that may stand there."""
        ends = {f: int(self.last in (None, f)) for f in self.palette}
        ways = [ends]
        for _ in range(self.count - 1):
            after = ways[-1]
            total = sum(after.values())
            ways.append({f: total - after[f] for f in self.palette})
        ways.reverse()
        ways[0] = {f: w * (self.first in (None, f)) for f, w in ways[0].items()}
        return ways

    def _next(self, order: Order, ways: list[dict[int, int]]) -> list[int]:
        here = ways[len(order)]
        return [f for f in self.palette if here[f] > 0 and (not order or f != order[-1])]

    def _drawn(self, ways: list[dict[int, int]], generator: np.random.Generator) -> Order:
        order: Order = ()
        while len(order) < self.count:
            allowed = self._next(order, ways)
            weights = [ways[len(order)][f] for f in allowed]
            most = max(
                weights
            )  # whole numbers of hundreds of digits: scaled before they are floats
            share = np.array([w / most for w in weights])
            order = (*order, int(generator.choice(allowed, p=share / share.sum())))
        return order


def rows(order: Order) -> IntArray:
    """Film rows (L,) of an order."""
    return np.array(order, dtype=np.intp)
