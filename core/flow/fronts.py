"""Which nodes of a mesh are eliminated together, and in what order.

The order is one of minimum degree on the graph of nodes. Nodes that are eliminated one after the other
with nearly the same neighbours are joined to fronts, small dense matrices, as far as that is estimated
to save time (J. W. H. Liu, SIAM Rev. 34, 1992, 82).
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

# What a front costs, measured [s]: each, for each number in it, for each multiplication.
_EACH_S, _NUMBER_S, _PRODUCT_S = 8e-5, 1e-8, 6e-11


@dataclass(frozen=True, slots=True, eq=False)
class Front:
    """A small dense matrix of the elimination.

    Attributes
    ----------
    begin, end : int
        Unknowns eliminated here, in the order of elimination.
    border : ndarray of int
        Unknowns that couple with them and are eliminated later, ascending.
    children : tuple of (int, ndarray)
        Fronts eliminated into this one: number, and where each of their border unknowns stands here.
    """

    begin: int
    end: int
    border: np.ndarray
    children: tuple[tuple[int, np.ndarray], ...]

    @property
    def pivots(self) -> int:
        """Number of unknowns eliminated."""
        return self.end - self.begin

    @property
    def size(self) -> int:
        """Number of rows."""
        return self.pivots + len(self.border)


class Fronts:
    """Order of elimination of nodes, each with some unknowns of its own.

    Parameters
    ----------
    rows, columns : ndarray of int
        Couplings between nodes, both ways.
    widths : ndarray of int, shape (nodes,)
        Unknowns of each node; those without any take no part.

    Attributes
    ----------
    all : list of Front
        Each after its children.
    place : ndarray of int, shape (nodes,)
        Where the unknowns of each node begin in the order of elimination.
    size, entries : int
        Number of unknowns, and of numbers that a factor holds.
    """

    def __init__(self, rows: np.ndarray, columns: np.ndarray, widths: np.ndarray) -> None:
        taken = (widths[rows] > 0) & (widths[columns] > 0)
        rows, columns = rows[taken], columns[taken]
        self._widths = widths
        order, parent, below = _minimum_degree(rows, columns, widths)
        group = _joined(parent, widths[order], below)
        last = np.zeros(len(order), dtype=np.int64)  # column of each group that is eliminated last
        np.maximum.at(last, group, np.arange(len(order)))
        tops, number = np.unique(last[group], return_inverse=True)  # by when they end: after their children
        order = order[np.argsort(number, kind="stable")]
        self._owner = np.full(len(widths), len(tops))
        self._owner[order] = np.sort(number)
        self._rank = np.full(len(widths), len(widths))
        self._rank[order] = np.arange(len(order))
        self.place = np.zeros(len(widths), dtype=np.int64)
        self.place[order] = np.cumsum(widths[order]) - widths[order]
        self.size = int(widths.sum())
        self._order = order
        self._make(rows, columns, len(tops))
        self.entries = sum(front.pivots * (front.pivots + 2 * len(front.border)) for front in self.all)

    def _make(self, rows: np.ndarray, columns: np.ndarray, count: int) -> None:
        """Set up the fronts with their borders: neighbours eliminated later, own ones and those of children."""
        owner, order = self._owner, self._order
        first = np.searchsorted(owner[order], np.arange(count + 1))
        self._begin = np.append(self.place[order], self.size)[first]
        later = owner[columns] > owner[rows]
        pairs = np.unique(owner[rows[later]] * len(owner) + self._rank[columns[later]])
        ends, ranks = np.searchsorted(pairs, np.arange(count + 1) * len(owner)), pairs % len(owner)
        children: list[list[int]] = [[] for _ in range(count)]
        borders: list[np.ndarray] = []
        self.all: list[Front] = []
        for number in range(count):
            own, inherited = ranks[ends[number] : ends[number + 1]], (borders[child] for child in children[number])
            border = np.unique(np.concatenate([own, *inherited]))
            borders.append(border[border >= first[number + 1]])
            if len(borders[-1]):
                children[owner[order[borders[-1][0]]]].append(number)
            self.all.append(self._front(number, borders[-1], children[number]))
        self._keys = np.concatenate([border + number * len(owner) for number, border in enumerate(borders)])
        widths = [self._widths[order[border]] for border in borders]
        self._offsets = np.append(np.concatenate([np.cumsum(w) - w for w in widths]), 0)

    def _front(self, number: int, border: np.ndarray, children: list[int]) -> Front:
        begin, end = int(self._begin[number]), int(self._begin[number + 1])
        unknowns = self._unknowns(border)
        places = []
        for child in children:
            theirs = self.all[child].border
            here = np.where(theirs < end, theirs - begin, end - begin + np.searchsorted(unknowns, theirs))
            places.append((child, here))
        return Front(begin, end, unknowns, tuple(places))

    def _unknowns(self, ranks: np.ndarray) -> np.ndarray:
        """Return the unknowns of nodes given by rank, node after node."""
        nodes = self._order[ranks]
        widths = self._widths[nodes]
        within = np.arange(widths.sum()) - np.repeat(np.cumsum(widths) - widths, widths)
        return np.repeat(self.place[nodes], widths) + within

    def front_of(self, rows: np.ndarray, columns: np.ndarray) -> np.ndarray:
        """Return the front that takes up the coupling of two nodes each, shape (n,)."""
        return np.minimum(self._owner[rows], self._owner[columns])

    def place_in(self, fronts: np.ndarray, nodes: np.ndarray) -> np.ndarray:
        """Return the first row of nodes (n,) in fronts (n,) that hold them."""
        inside = self._owner[nodes] == fronts
        found = np.searchsorted(self._keys, fronts * len(self._owner) + self._rank[nodes])
        begin, end = self._begin[fronts], self._begin[fronts + 1]
        return np.where(inside, self.place[nodes] - begin, end - begin + self._offsets[found])


def _minimum_degree(
    rows: np.ndarray, columns: np.ndarray, widths: np.ndarray
) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Return nodes in the order of elimination, the next one each couples with, and the unknowns of all those."""
    from scipy.sparse import coo_array, eye_array
    from scipy.sparse.linalg import splu

    used = np.flatnonzero(widths > 0)
    place = np.full(len(widths), -1)
    place[used] = np.arange(len(used))
    shape = (len(used), len(used))
    graph = coo_array((np.ones(len(rows)), (place[rows], place[columns])), shape=shape).tocsc()
    graph.data[:] = -1.0
    graph = (graph + 1000.0 * eye_array(len(used))).tocsc()
    lu = splu(graph, permc_spec="MMD_AT_PLUS_A", diag_pivot_thresh=0.0, relax=1, options={"SymmetricMode": True})
    order = used[np.argsort(lu.perm_c)]
    lower = lu.L.tocoo()
    row, column = lower.row[lower.row > lower.col], lower.col[lower.row > lower.col]
    parent = np.full(len(used), len(used))
    np.minimum.at(parent, column, row)
    return order, parent, np.bincount(column, widths[order][row], len(used))


def _joined(parent: np.ndarray, pivots: np.ndarray, below: np.ndarray) -> np.ndarray:
    """Return the group of each column of an elimination tree, named by one of its columns.

    Columns are taken from the leaves up; each takes in those groups below it that save time.
    """
    count = len(parent)
    mine, border = pivots.astype(float).tolist(), below.tolist()
    children: list[list[int]] = [[] for _ in range(count + 1)]
    taken_by = list(range(count))
    up = parent.tolist()
    for column in range(count):
        todo, kept = children[column], []
        while todo:
            child = todo.pop()
            p, q = mine[column], border[column]
            if _seconds(mine[child] + p, q) < _seconds(mine[child], border[child]) + _seconds(p, q):
                mine[column] += mine[child]
                taken_by[child] = column
                todo += children[child]
            else:
                kept.append(child)
        children[column] = kept
        children[up[column]].append(column)
    group = np.array(taken_by)
    while not np.array_equal(group, group[group]):
        group = group[group]
    return group


def _seconds(pivots: float, border: float) -> float:
    """Return the estimated time for a front."""
    products = pivots * (pivots * pivots / 3 + pivots * border + border * border)
    return _EACH_S + _NUMBER_S * (pivots + border) ** 2 + _PRODUCT_S * products
