"""Talk on stderr: what is being done, how much is left, a heartbeat where there is no terminal.

Takes steps with the seconds each is expected to take; gives lines of text to a stream. The estimate of the time left
is scaled by how the steps so far compared with what was expected of them. Must not know what a step does.
"""

import threading
import time
from collections.abc import Iterator
from contextlib import contextmanager
from typing import TextIO

__all__ = ["Progress"]


class Progress:
    """`plan` announces steps ahead; `step` runs one; `say` adds a remark. Safe to use from several threads."""

    def __init__(self, stream: TextIO | None, heartbeat_s: float = 15.0) -> None:
        self._stream = stream
        self._heartbeat_s = heartbeat_s
        self._lock = threading.Lock()
        self._expected: dict[str, float] = {}
        self._done: set[str] = set()
        self._running: dict[str, float] = {}
        self._began = time.monotonic()
        self._spent_expected = 0.0

    def plan(self, steps: dict[str, float]) -> None:
        """Announce steps and the seconds each is expected to take."""
        with self._lock:
            self._expected.update(steps)

    def say(self, text: str) -> None:
        """One line, with the time left."""
        with self._lock:
            self._write(text)

    @contextmanager
    def step(self, name: str) -> Iterator[None]:
        """Run one announced step, with a heartbeat while it lasts."""
        with self._lock:
            self._running[name] = time.monotonic()
            self._write(f"{name} ...")
        over = threading.Event()
        beat = threading.Thread(target=self._beat, args=(name, over), daemon=True)
        beat.start()
        try:
            yield
        finally:
            over.set()
            with self._lock:
                self._done.add(name)
                self._running.pop(name, None)
                self._spent_expected += self._expected.get(name, 0.0)

    def _beat(self, name: str, over: threading.Event) -> None:
        while not over.wait(self._heartbeat_s):
            with self._lock:
                spent = time.monotonic() - self._running.get(name, time.monotonic())
                self._write(f"{name}: still running after {spent:.0f} s")

    def _left(self) -> str:
        total = sum(self._expected.values())
        remaining = total - self._spent_expected
        if not self._expected or remaining <= 0:
            return ""
        spent = time.monotonic() - self._began
        pace = spent / self._spent_expected if self._spent_expected > 5 else 1.0
        seconds = max(1, round(remaining * min(max(pace, 0.3), 4.0)))
        return f", about {seconds} s left" if seconds < 120 else f", about {round(seconds / 60)} min left"

    def _write(self, text: str) -> None:
        if self._stream is None:
            return
        count = f"[{len(self._done)}/{len(self._expected)}{self._left()}] " if self._expected else ""
        self._stream.write(f"{count}{text}\n")
        self._stream.flush()
