"""The record book, opened when first needed and brought to today's tables."""

from __future__ import annotations

import threading
from pathlib import Path

from sqlalchemy import Engine

from server import storage
from server.errors import JointError


class Records:
    """The one record book of a running program."""

    def __init__(self, path: Path) -> None:
        self.path = path
        self._engine: Engine | None = None
        self._opening = threading.Lock()

    @property
    def engine(self) -> Engine:
        """The engine; the first call makes the folder and the tables."""
        if self._engine is None:
            with self._opening:
                if self._engine is None:
                    self._engine = self._opened()
        return self._engine

    def close(self) -> None:
        """Let go of the file."""
        if self._engine is not None:
            self._engine.dispose()
            self._engine = None

    def _opened(self) -> Engine:
        try:
            self.path.parent.mkdir(parents=True, exist_ok=True)
        except OSError as error:
            raise JointError(
                f"The folder {self.path.parent} cannot be made ({error.strerror}). "
                "Choose another place for the records."
            ) from error
        engine = storage.engine(self.path)
        storage.migrate(engine)
        return engine
