"""A bounded memory of solved tables, keyed by their content: six functions over the same tables solve once."""

from __future__ import annotations

import marshal
import pickle
from collections import OrderedDict
from collections.abc import Callable, Hashable
from typing import Any, Generic, TypeVar

from xlaxial.cells import CellRange

Value = TypeVar("Value")


def content_key(argument: Any) -> Hashable:
    """Return a key that differs wherever the cells, their types or their place in the workbook differ."""
    if not isinstance(argument, list):
        return _frozen(argument)
    place = (argument.sheet, argument.row, argument.column) if isinstance(argument, CellRange) else None
    return place, _frozen(list(argument))


def _frozen(cells: Any) -> bytes:
    try:
        return marshal.dumps(cells, 2)
    except ValueError:  # error values and dates
        return pickle.dumps(cells)


class Memory(Generic[Value]):
    """The last few results of a costly step.

    Parameters
    ----------
    size : int
        How many results are kept; the one not asked for longest is dropped.
    """

    def __init__(self, size: int) -> None:
        self._size = size
        self._kept: OrderedDict[Hashable, Value] = OrderedDict()
        self.hits = 0
        self.misses = 0

    def get(self, key: Hashable, make: Callable[[], Value]) -> Value:
        """Return what is kept under a key, made first where there is nothing."""
        if key in self._kept:
            self.hits += 1
            self._kept.move_to_end(key)
            return self._kept[key]
        self.misses += 1
        value = make()
        self._kept[key] = value
        while len(self._kept) > self._size:
            self._kept.popitem(last=False)
        return value

    def clear(self) -> None:
        """Forget everything."""
        self._kept.clear()
        self.hits = self.misses = 0
