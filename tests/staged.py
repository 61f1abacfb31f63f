"""The demo with seed 1, made once a test run, whichever process of the run comes first."""

from __future__ import annotations

import fcntl
import os
from pathlib import Path

import pytest

from effluent.services.demo import make

__all__ = ["SEED", "staged"]

SEED = 1


def staged(factory: pytest.TempPathFactory) -> Path:
    """Return the folder of the demo; whoever writes to it must copy it first."""
    shared = factory.getbasetemp()
    if "PYTEST_XDIST_WORKER" in os.environ:
        shared = shared.parent
    folder = shared / "demo"
    with (shared / "demo.lock").open("w") as lock:
        fcntl.flock(lock, fcntl.LOCK_EX)
        if not folder.exists():
            make(str(folder), seed=SEED)
    return folder
