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


class Bar:
    """A bar on stderr that fills as parts of a long piece of work are done.

    On a terminal it is redrawn in place; elsewhere a line is written for every tenth.
    """

    width = 40
    """Characters."""

    def __init__(self, name: str) -> None:
        self._name = name
        self._start = time.monotonic()
        self._first = 0
        self._tenth = -1

    def __call__(self, done: int, total: int) -> None:
        """Show that `done` of `total` parts are done; the first call sets what was done before."""
        if self._tenth < 0:
            self._first = done
        share = done / max(total, 1)
        tenth = int(10.0 * share)
        if sys.stderr.isatty():
            end = "\n" if done == total else ""
            print(f"\r{self._line(done, total, share)}", end=end, file=sys.stderr, flush=True)
        elif tenth > self._tenth:
            print(self._line(done, total, share), file=sys.stderr, flush=True)
        self._tenth = tenth

    def _line(self, done: int, total: int, share: float) -> str:
        seconds = time.monotonic() - self._start
        computed = done - self._first
        left = f", {seconds * (total - done) / computed:.0f} s left" if computed else ""
        filled = round(self.width * share)
        bar = "█" * filled + "·" * (self.width - filled)
        return f"waveguide: {self._name} {bar} {100.0 * share:3.0f} %{left}".ljust(100)
