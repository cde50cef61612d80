"""A small store for what was worked out before: whoever types loads does not change the section."""

from __future__ import annotations

from collections import OrderedDict
from collections.abc import Callable, Hashable
from threading import Lock
from typing import Generic, TypeVar

V = TypeVar("V")


class Remembered(Generic[V]):
    """Keeps the values of the contents that were asked for last, at most ``most`` of them."""

    def __init__(self, most: int) -> None:
        self.most = most
        self._kept: OrderedDict[Hashable, V] = OrderedDict()
        self._lock = Lock()

    def of(self, content: Hashable, make: Callable[[], V]) -> V:
        """The value that belongs to a content; made now if it is not kept. What ``make`` raises is not kept."""
        with self._lock:
            if content in self._kept:
                self._kept.move_to_end(content)
                return self._kept[content]
        made = make()
        with self._lock:
            self._kept[content] = made
            while len(self._kept) > self.most:
                self._kept.popitem(last=False)
        return made

    def forget(self) -> None:
        """Drop everything, so that the next one of each content is made anew."""
        with self._lock:
            self._kept.clear()
