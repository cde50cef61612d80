"""kill -9 in the middle of saves: what was acknowledged is there, whole, and so is the file."""

from __future__ import annotations

import multiprocessing
import random
import sys
import time
from pathlib import Path

import pytest
from sqlalchemy import Engine, text

from server import jobs, storage
from tests.jobs.killed import save_until_killed

KILLS = 20


@pytest.mark.slow
@pytest.mark.skipif(sys.platform == "win32", reason="no kill -9 there")
def test_no_acknowledged_save_is_lost(book: Engine) -> None:
    path = Path(str(book.url.database))
    processes = multiprocessing.get_context("forkserver")
    processes.set_forkserver_preload(["tests.jobs.killed"])
    acknowledged: list[tuple[int, str]] = []
    moments = random.Random()
    for _ in range(KILLS):
        told, tells = processes.Pipe(duplex=False)
        process = processes.Process(target=save_until_killed, args=(path, tells))
        process.start()
        tells.close()
        acknowledged += [told.recv() for _ in range(moments.randint(1, 4))]  # it is in the midst of saving
        time.sleep(moments.uniform(0.0, 0.05))
        process.kill()
        process.join()
        assert process.exitcode == -9
        try:
            while True:
                acknowledged.append(told.recv())
        except EOFError:
            pass
        storage.check_whole(path)
    with storage.reading(book) as session:
        kept = dict(session.execute(text("SELECT id, sha256 FROM check_revisions")).all())  # type: ignore[arg-type]
        assert [one for one in acknowledged if kept.get(one[0]) != one[1]] == []
        # A save that was not acknowledged may be there too, but then whole, and at most one a kill.
        assert len(kept) <= len(acknowledged) + KILLS
        assert [number for number in kept if jobs.altered(session, number) is not None] == []
