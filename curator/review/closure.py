"""Must-links and cannot-links among numbered nodes: the parts they make, contradictions, shortest chains."""

from __future__ import annotations

from collections import defaultdict, deque
from collections.abc import Sequence
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from curator.domain import Bools, Ints
from curator.neighbours.components import components


def ordered(u: int, v: int) -> tuple[int, int]:
    """The one name of an unordered pair of nodes."""
    return (u, v) if u < v else (v, u)


class Closure:
    """Must-links (m, 2) and cannot-links (k, 2) among n nodes, and the parts they make."""

    def __init__(self, n: int, same: Ints, different: Ints) -> None:
        self.n, self.same, self.different = n, same, different
        self.raw = components(n, same)
        """(n,): parts tied by all must-links."""
        self.contradicted: Bools = self.raw[different[:, 0]] == self.raw[different[:, 1]]
        self.suspect: Bools = _suspect(n, same, different[self.contradicted], self.raw)
        """Along `same`: on a simple chain between the ends of a contradicted cannot-link."""
        self.sound = components(n, same[~self.suspect]) if self.suspect.any() else self.raw
        """(n,): parts tied by must-links that are not suspect."""
        held = different[~self.contradicted]
        self.raw_links = _links(self.raw, held)
        self.sound_links = _links(self.sound, held)
        self.apart: dict[int, set[int]] = defaultdict(set)
        for a, b in self.sound_links:
            self.apart[a].add(b)
            self.apart[b].add(a)

    def linked(self, u: int, v: int) -> tuple[bool, bool]:
        """Whether cannot-links keep two nodes apart: by all must-links, and by those that are not suspect."""
        raw, sound = (ordered(int(part[u]), int(part[v])) for part in (self.raw, self.sound))
        return raw in self.raw_links, sound in self.sound_links

    @cached_property
    def ties(self) -> list[list[int]]:
        return _adjacent(self.n, self.same)

    @cached_property
    def sound_ties(self) -> list[list[int]]:
        return _adjacent(self.n, self.same[~self.suspect])

    @cached_property
    def sound_bars(self) -> list[list[int]]:
        return _adjacent(self.n, self.different[~self.contradicted])


def _links(part: Ints, different: Ints) -> set[tuple[int, int]]:
    return set(map(tuple, np.sort(part[different], axis=1).tolist()))


def _adjacent(n: int, edges: Ints) -> list[list[int]]:
    """Neighbours of each node, ascending: a search through them finds the same chain always."""
    both = np.concatenate([edges, edges[:, ::-1]])
    both = both[np.lexsort((both[:, 1], both[:, 0]))]
    ends = np.cumsum(np.bincount(both[:, 0], minlength=n)).tolist()
    to = both[:, 1].tolist()
    return [to[start:end] for start, end in zip([0, *ends], ends, strict=False)]


def shortest_chain(start: int, end: int, ties: list[list[int]], bars: list[list[int]] | None) -> list[int]:
    """The nodes of a shortest way, breadth first: over ties alone, or with `bars` over ties and just one bar."""
    goal = (end, bars is not None)
    came: dict[tuple[int, bool], tuple[int, bool] | None] = {(start, False): None}
    waiting = deque([(start, False)])
    while goal not in came:
        here = waiting.popleft()
        node, crossed = here
        steps = [(to, crossed) for to in ties[node]]
        if bars is not None and not crossed:
            steps += [(to, True) for to in bars[node]]
        for step in steps:
            if step not in came:
                came[step] = here
                waiting.append(step)
    chain, at = [end], came[goal]
    while at is not None:
        chain.append(at[0])
        at = came[at]
    return chain[::-1]


def _suspect(n: int, same: Ints, contradicted: Ints, raw: Ints) -> Bools:
    """Along `same` (m, 2): whether a must-link is on a simple chain between the ends of a contradicted cannot-link.

    All simple chains between two nodes run through the same biconnected blocks, those of the tree edges between them
    in a depth-first tree (Hopcroft and Tarjan 1973), and through every edge of these.
    """
    suspect = np.zeros(len(same), dtype=np.bool_)
    if not len(contradicted):
        return suspect
    near = np.isin(raw[same[:, 0]], raw[contradicted[:, 0]])
    order, parent = _depth_first(_adjacent(n, same[near]), contradicted[:, 0].tolist())
    turn, block = _blocks(n, same[near], order, parent)
    # Painted tree edges are skipped by later climbs, so that all climbs together stay near linear.
    top = list(range(n))
    painted = np.zeros(n, dtype=np.bool_)
    for u, v in contradicted.tolist():
        u, v = _top(top, u), _top(top, v)
        while u != v:
            if turn[u] < turn[v]:
                u, v = v, u
            painted[block[u]] = True
            top[u] = parent[u]
            u = _top(top, u)
    ends = same[near]
    deeper = np.where(turn[ends[:, 0]] > turn[ends[:, 1]], ends[:, 0], ends[:, 1])
    suspect[near] = painted[block[deeper]]
    return suspect


def _top(top: list[int], node: int) -> int:
    while top[node] != node:
        top[node] = top[top[node]]
        node = top[node]
    return node


def _depth_first(near: list[list[int]], roots: Sequence[int]) -> tuple[list[int], list[int]]:
    """Nodes reached from `roots` in the order of a depth-first search, and each node's parent; -1 for none."""
    parent, order, met = [-1] * len(near), [], [False] * len(near)
    for root in roots:
        waiting = [(root, -1)]
        while waiting:
            node, above = waiting.pop()
            if met[node]:
                continue
            met[node] = True
            parent[node] = above
            order.append(node)
            waiting += [(to, node) for to in near[node] if not met[to]]
    return order, parent


def _blocks(
    n: int, edges: Ints, order: Sequence[int], parent: Sequence[int]
) -> tuple[NDArray[np.int64], NDArray[np.int64]]:
    """Each node's turn in the search, and the block of its tree edge, named by a node; an edge is its later end's."""
    turn = np.zeros(n, dtype=np.int64)
    turn[order] = np.arange(len(order))
    lowest = turn.copy()
    # A tree edge's own parent among these does no harm: a block begins where nothing below reaches above the parent.
    np.minimum.at(lowest, edges[:, 0], turn[edges[:, 1]])
    np.minimum.at(lowest, edges[:, 1], turn[edges[:, 0]])
    low, turns = lowest.tolist(), turn.tolist()
    for node in reversed(order):
        if parent[node] >= 0:
            low[parent[node]] = min(low[parent[node]], low[node])
    block = list(range(n))
    for node in order:
        above = parent[node]
        if above >= 0 and low[node] < turns[above]:
            block[node] = block[above]
    return turn, np.array(block, dtype=np.int64)
