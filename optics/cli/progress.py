"""Progress on standard error, on a terminal alone."""

import sys
import time
from collections.abc import Callable

NEWEST_S = 0.2


def progress(done_before: int = 0) -> Callable[[int, int], None]:
    """Return what shows points done, rate and time left; silent where standard error is no terminal.

    Parameters
    ----------
    done_before
        Points that an earlier run did: they say nothing about the pace.
    """
    start = time.monotonic()
    last = [0.0]

    def show(done: int, points: int) -> None:
        now = time.monotonic()
        if not sys.stderr.isatty() or (now - last[0] < NEWEST_S and done < points):
            return
        last[0] = now
        sys.stderr.write(f"\r{line(done, points, (done - done_before) / max(now - start, 1e-9)):<70}")
        sys.stderr.write("\n" if done == points else "")
        sys.stderr.flush()

    return show


def line(done: int, points: int, per_s: float) -> str:
    """Return points done, rate and time left in one line."""
    left = (points - done) / per_s if per_s > 0 else float("inf")
    clock = f"{int(left // 3600)}:{int(left % 3600 // 60):02d}:{int(left % 60):02d}" if left < 1e7 else "unknown"
    return f"{done} of {points} points, {per_s:.3g} a second, {clock} left"
