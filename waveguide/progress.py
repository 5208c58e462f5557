"""Saying on standard error what is being done."""

from __future__ import annotations

import sys
import threading
import time


class Progress:
    """Says on stderr what is being done, once the work has taken two seconds.

    Called with the name of a stage when it begins, from the pipeline's own thread. A timer
    names the stage that is running when the two seconds are over.
    """

    patience = 2.0
    """Seconds of silence."""

    def __init__(self) -> None:
        self._stage = ""
        self._start = time.monotonic()
        self._timer = threading.Timer(self.patience, self._report)
        self._timer.daemon = True

    def __enter__(self) -> Progress:
        self._timer.start()
        return self

    def __exit__(self, *_: object) -> None:
        self._timer.cancel()

    def __call__(self, stage: str) -> None:
        """Take note of a stage that begins."""
        self._stage = stage
        if time.monotonic() - self._start > self.patience:
            self._report()

    def _report(self) -> None:
        if self._stage:
            seconds = time.monotonic() - self._start
            print(f"waveguide: {seconds:.0f} s, {self._stage} …", file=sys.stderr, flush=True)
