"""Keeps a worker process from outliving the search that started it, however that one ends."""

from __future__ import annotations

import ctypes
import os
import signal
import sys
import threading
import time

LOOK_EVERY_S = 1.0
PR_SET_PDEATHSIG = 1  # <linux/prctl.h>


def follow_parent(parent_id: int) -> None:
    """Makes this process end when the process `parent_id` ends, and leave Ctrl-C to that process.

    On Linux the kernel sends the signal; a thread that looks whether the parent is still the same one does it everywhere else.
    """
    signal.signal(signal.SIGINT, signal.SIG_IGN)
    if sys.platform.startswith("linux"):
        ctypes.CDLL(None).prctl(PR_SET_PDEATHSIG, signal.SIGKILL)
    threading.Thread(target=_watch, args=(parent_id,), daemon=True).start()


def _watch(parent_id: int) -> None:
    while os.getppid() == parent_id:
        time.sleep(LOOK_EVERY_S)
    os._exit(1)
