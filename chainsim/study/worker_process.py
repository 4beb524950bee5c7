"""A worker process as its driver sees it."""

from __future__ import annotations

import contextlib
import json
import queue
import subprocess
import sys
import threading
import time
from pathlib import Path
from typing import IO, Any

from chainsim.study.jobs import Job, one_thread_each

_FAREWELL = 2.0  # time a worker has to leave by itself before it is ended [s]


class WorkerProcess:
    """A worker process and what it has in hand."""

    def __init__(self, reports: queue.SimpleQueue[tuple[WorkerProcess, Any]], log: IO[str]) -> None:
        self.job: Job | None = None
        self.since = 0.0
        self.too_long = False
        self.ready = False
        # Its own process group: Ctrl-C reaches the driver alone, which then decides.
        apart: dict[str, Any] = (
            {"creationflags": getattr(subprocess, "CREATE_NEW_PROCESS_GROUP", 0)}
            if sys.platform == "win32"
            else {"start_new_session": True}
        )
        with one_thread_each():
            self.process = subprocess.Popen(
                [sys.executable, "-m", "chainsim.study.worker"],
                stdin=subprocess.PIPE,
                stdout=subprocess.PIPE,
                stderr=log,
                text=True,
                encoding="utf-8",
                **apart,
            )
        thread = threading.Thread(target=self._listen, args=(reports,), daemon=True)
        thread.start()

    def _listen(self, reports: queue.SimpleQueue[tuple[WorkerProcess, Any]]) -> None:
        """Pass on every answer, then None when the process is gone."""
        answers: IO[str] | None = self.process.stdout
        with contextlib.suppress(ValueError, OSError):
            for line in answers or ():
                reports.put((self, json.loads(line)))
        self.process.wait()
        reports.put((self, None))

    def send(self, message: dict[str, Any]) -> None:
        """Hand a message over; a worker that is gone reports that by itself."""
        with contextlib.suppress(OSError, ValueError):
            assert self.process.stdin is not None
            self.process.stdin.write(json.dumps(message) + "\n")
            self.process.stdin.flush()

    def take(self, job: Job) -> None:
        """Start a job."""
        self.job, self.since = job, time.monotonic()
        self.send({"job": job.to_data()})

    def end(self, at_once: bool) -> None:
        """End the process."""
        with contextlib.suppress(OSError):
            if at_once:
                self.process.kill()
            assert self.process.stdin is not None
            self.process.stdin.close()
        try:
            self.process.wait(_FAREWELL)
        except subprocess.TimeoutExpired:
            self.process.kill()
            self.process.wait()


def log_of(job: Job) -> IO[str]:
    """Open the file that takes what workers print, so that it never disturbs a live table.

    Parameters
    ----------
    job : Job
        Any job of the sweep; the file stands in its folder.

    Returns
    -------
    file
        The file, open for appending.
    """
    return Path(job.folder, "workers.log").open("a", encoding="utf-8")
