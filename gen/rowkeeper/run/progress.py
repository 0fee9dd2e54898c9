"""Talk on stderr: what is being done, how much is left, a heartbeat where there is no terminal.

Takes steps with the seconds each is expected to take; gives lines of text to a stream. The estimate of the time left
is scaled by how the steps so far compared with what was expected of them. Must not know what a step does.
"""

import threading
import time
from collections.abc import Iterator
from contextlib import contextmanager
from typing import TextIO

__all__ = ["EXPECTED_S", "Progress"]

# Seconds each step takes on two cores with warm caches: only the estimate of the time left rests on them.
EXPECTED_S = {"plan": 3.0, "fit": 14.0, "prove": 60.0, "bench": 45.0}


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
        """Expected rest, stretched by the pace so far; a step that runs has used up part of what was expected of it."""
        now = time.monotonic()
        pace = self._pace(now)
        rest = 0.0
        for name, expected in self._expected.items():
            if name in self._running:
                rest += max(expected * pace - (now - self._running[name]), expected * 0.05)
            elif name not in self._done:
                rest += expected * pace
        if rest <= 0:
            return ""
        seconds = max(1, round(rest))
        return f", about {seconds} s left" if seconds < 120 else f", about {round(seconds / 60)} min left"

    def _pace(self, now: float) -> float:
        """How much longer than expected the finished steps took, within reason."""
        if self._spent_expected < 5:
            return 1.0
        return min(max((now - self._began - self._running_for(now)) / self._spent_expected, 0.3), 4.0)

    def _running_for(self, now: float) -> float:
        return max((now - began for began in self._running.values()), default=0.0)

    def _write(self, text: str) -> None:
        if self._stream is None:
            return
        count = f"[{len(self._done)}/{len(self._expected)}{self._left()}] " if self._expected else ""
        self._stream.write(f"{count}{text}\n")
        self._stream.flush()
