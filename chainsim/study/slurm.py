"""A SLURM queue as a dask cluster, through dask-jobqueue."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from chainsim.errors import CallError
from chainsim.study.jobs import ONE_THREAD

_SLURM_DEFAULTS = {"walltime": "01:00:00", "memory": "2 GB", "jobs": 1}


# A worker leaves before the queue ends it, and not all at the same moment.
_LEAVE_EARLY = ["--lifetime-stagger", "4m", "--lifetime-restart"]


def slurm_cluster(settings: Mapping[str, Any]) -> Any:
    """Cluster whose workers are jobs of a SLURM queue, one core each; no job is sent yet.

    Parameters
    ----------
    settings : mapping of str to object
        `queue`, `account`, `walltime` (hours:minutes:seconds) and `memory` of a job.

    Returns
    -------
    SLURMCluster
        The cluster.

    Raises
    ------
    CallError
        If dask-jobqueue is not installed, or the wall time is not written so.
    """
    try:
        from dask_jobqueue import SLURMCluster
    except ImportError:
        raise CallError("a SLURM queue needs: pip install chainsim[cluster]") from None
    chosen = {**_SLURM_DEFAULTS, **settings}
    return SLURMCluster(
        queue=chosen.get("queue"),
        account=chosen.get("account"),
        cores=1,
        processes=1,
        memory=chosen["memory"],
        walltime=chosen["walltime"],
        worker_extra_args=["--lifetime", f"{lifetime(chosen['walltime'])}s", *_LEAVE_EARLY],
        job_script_prologue=[f"export {name}=1" for name in ONE_THREAD],
        scheduler_options={"dashboard_address": None},
    )


def lifetime(walltime: str) -> int:
    """Seconds after which a worker leaves: nine tenths of its wall time.

    Parameters
    ----------
    walltime : str
        Hours, minutes and seconds, ``01:00:00``.

    Returns
    -------
    int
        Lifetime [s].

    Raises
    ------
    CallError
        If the wall time is not written so.
    """
    parts = walltime.split(":")
    if len(parts) != 3 or not all(part.isdecimal() for part in parts):
        raise CallError(f"walltime {walltime!r}: hours, minutes and seconds, such as 01:00:00")
    hours, minutes, seconds = (int(part) for part in parts)
    return (hours * 3600 + minutes * 60 + seconds) * 9 // 10
