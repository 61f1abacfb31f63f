"""Cells that repeat down a column are read once."""

from __future__ import annotations

from collections.abc import Callable, Hashable, Iterable
from typing import Generic, TypeVar

from effluent.errors import EffluentError

__all__ = ["Memo"]

K = TypeVar("K", bound=Hashable)
T = TypeVar("T")

_MOST = 100_000


class Memo(dict[K, T], Generic[K, T]):
    """What each distinct cell came to, and why some were refused.

    A dictionary that reads what it does not hold yet; asking it for a column costs one look-up a cell.
    """

    def __init__(self, read: Callable[[K], T], failed: T) -> None:
        super().__init__()
        self._read = read
        self._failed = failed
        self.refused: dict[K, str] = {}

    def __missing__(self, cell: K) -> T:
        try:
            found = self._read(cell)
        except EffluentError as error:
            self.refused[cell] = str(error.args[-1])
            found = self._failed
        self[cell] = found
        return found

    def column(self, cells: Iterable[K]) -> list[T]:
        """Return what each cell came to."""
        self.forget()
        return list(map(self.__getitem__, cells))

    def forget(self) -> None:
        """Forget all if more is remembered than memory should hold."""
        if len(self) > _MOST:
            self.clear()
            self.refused.clear()
