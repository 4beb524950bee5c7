"""A worker process of the embedded engine: ``python -m chainsim.study.worker``.

Jobs arrive as lines of JSON on standard input and outcomes leave as lines of JSON on standard
output. It is a program of its own rather than a copy of its parent, so that sweeps start from
notebooks and unguarded scripts alike. What a run prints goes to standard error,
which the driver turns into a file. When the
driver goes, its end of the pipe closes and the worker ends at once: a driver that was killed
and started again never meets a worker of its former life.
"""

from __future__ import annotations

import json
import os
import queue
import sys
import threading
from typing import Any, TextIO

from chainsim.study.jobs import job_from_data
from chainsim.study.performing import perform
from chainsim.study.simulate import warm


def main() -> None:
    """Take jobs until the input ends."""
    answers = os.fdopen(os.dup(1), "w", encoding="utf-8")
    os.dup2(2, 1)
    jobs: queue.SimpleQueue[dict[str, Any]] = queue.SimpleQueue()
    threading.Thread(target=_listen, args=(sys.stdin, jobs), daemon=True).start()
    answer: dict[str, Any] = {"ready": os.getpid()}
    while True:
        answers.write(json.dumps(answer) + "\n")
        answers.flush()
        message = jobs.get()
        answer = _warm(message["warm"]) if "warm" in message else _outcome(message["job"])


def _listen(source: TextIO, jobs: queue.SimpleQueue[dict[str, Any]]) -> None:
    """Pass on what arrives; end the process when the driver is gone, busy or not."""
    for line in source:
        jobs.put(json.loads(line))
    os._exit(0)


def _outcome(data: dict[str, Any]) -> dict[str, Any]:
    outcome = perform(job_from_data(data))
    return {
        "id": outcome.id,
        "state": outcome.state,
        "code": outcome.code,
        "text": outcome.text,
    }


def _warm(data: dict[str, Any]) -> dict[str, Any]:
    """Import and compile what a job needs, so that no other worker compiles it again."""
    try:
        warm(job_from_data(data))
    except Exception as error:  # the job itself meets the same fault and reports it in full
        return {"warm": f"{type(error).__name__}: {error}"}
    return {"warm": "ready"}


if __name__ == "__main__":
    main()
