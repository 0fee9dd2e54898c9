"""Talk on stderr."""

import io
import time

from rowkeeper.run.progress import Progress


def test_counts_steps_and_says_what_is_left() -> None:
    """Each line says how many steps are done and about how long the rest takes."""
    stream = io.StringIO()
    progress = Progress(stream)
    progress.plan({"prove": 30.0, "bench": 20.0})
    with progress.step("prove"):
        pass
    with progress.step("bench"):
        pass
    assert stream.getvalue().splitlines()[0] == "[0/2, about 50 s left] prove ..."
    assert stream.getvalue().splitlines()[1].startswith("[1/2, about ")


def test_heartbeat_without_a_terminal() -> None:
    """A long step says that it is alive."""
    stream = io.StringIO()
    progress = Progress(stream, heartbeat_s=0.02)
    with progress.step("route"):
        time.sleep(0.1)
    assert "route: still running after 0 s" in stream.getvalue()


def test_quiet_says_nothing() -> None:
    """Without a stream nothing is said, and steps run all the same."""
    progress = Progress(None)
    with progress.step("route"):
        progress.say("x")
