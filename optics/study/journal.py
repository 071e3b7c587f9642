"""What a study has found so far, on disk: appended as it goes, whole up to the last chunk whatever ends the process."""

import json
import os
from collections.abc import Callable, Iterator, Mapping, Sequence
from pathlib import Path
from typing import Any, BinaryIO

import numpy as np

from optics.errors import InputError
from optics.study.engine import Pack, Place, Unit, Work, run

JOURNAL = "answers.jsonl"
BASIS = "basis.json"


class Journal:
    """Answers by point, in a folder of their own.

    Use as a context manager. A line of ``answers.jsonl`` is one answer; a line that a kill cut off is dropped on the
    next opening, and its point is done again. ``basis.json`` holds what the answers rest on.

    Parameters
    ----------
    folder
        Made when it is not there.
    basis
        Names and values (hashes, versions, settings) that must be the same when the study goes on.
    points
        How many points there are.
    restart
        Whether to drop what is there and begin anew.

    Raises
    ------
    InputError
        When the folder holds answers that rest on something else, or another process is at work on them.
    """

    def __init__(self, folder: Path, *, basis: Mapping[str, Any], points: int, restart: bool = False) -> None:
        self.folder, self.points = folder, points
        self._basis = json.loads(json.dumps(dict(basis)))
        self._at = np.full(points, -1, dtype=np.int64)  # where the line of each point begins
        self._restart = restart
        self._file: BinaryIO | None = None

    def __enter__(self) -> "Journal":
        try:
            self.folder.mkdir(exist_ok=True)
            self._file = (self.folder / JOURNAL).open("a+b")
            self._lock(self._file)
            if self._restart:
                self._file.truncate(0)
                (self.folder / BASIS).unlink(missing_ok=True)
            self._check_basis()
            self._read(self._file)
        except OSError as error:
            self.close()
            raise InputError(f"{self.folder}: cannot be used ({error.strerror or error})") from None
        except BaseException:
            self.close()
            raise
        return self

    def __exit__(self, *_: object) -> None:
        self.close()

    def close(self) -> None:
        """Give the files up; what was appended stays."""
        if self._file is not None:
            self._file.close()
            self._file = None

    @property
    def done(self) -> int:
        """How many points have an answer."""
        return int((self._at >= 0).sum())

    def missing(self) -> list[int]:
        """Return the points without an answer."""
        return [int(point) for point in np.flatnonzero(self._at < 0)]

    def append(self, points: Sequence[int], answers: Sequence[Mapping[str, Any]]) -> None:
        """Add answers; they are on the disk when this returns.

        Raises
        ------
        InputError
            When they cannot be written; everything before them is kept.
        """
        file = self._opened()
        lines = [
            json.dumps({"point": int(point), **found}).encode() + b"\n"
            for point, found in zip(points, answers, strict=True)
        ]
        end = file.seek(0, os.SEEK_END)
        try:
            file.write(b"".join(lines))
            file.flush()
            os.fsync(file.fileno())
        except OSError as error:
            raise InputError(
                f"{self.folder}: cannot be written ({error.strerror or error}); {self.done} of {self.points} points "
                "are kept: make room and run the same command again"
            ) from None
        for point, line in zip(points, lines, strict=True):
            self._at[point] = end
            end += len(line)

    def fill(
        self,
        work: Work,
        pack: Pack,
        place: Place,
        progress: Callable[[int, int], None] | None = None,
        *,
        units: Sequence[Unit] = (),
    ) -> None:
        """Work on every point without an answer, ``units`` together, and append the answers as they come."""
        for points, answers in run(work, pack, self.missing(), place, units=units):
            self.append(points, answers)
            if progress:
                progress(self.done, self.points)

    def answers(self) -> Iterator[tuple[int, dict[str, Any]]]:
        """Yield points and answers in the order of the points, one at a time."""
        file = self._opened()
        for point in np.flatnonzero(self._at >= 0):
            file.seek(self._at[point])
            found = json.loads(file.readline())
            yield int(found.pop("point")), found

    def remove(self) -> None:
        """Remove the folder: its answers stand elsewhere now."""
        self.close()
        for name in (JOURNAL, BASIS):
            (self.folder / name).unlink(missing_ok=True)
        try:
            self.folder.rmdir()
        except OSError:
            return  # somebody put something of their own there

    def _opened(self) -> BinaryIO:
        if self._file is None:
            raise ValueError("the journal is not open")
        return self._file

    def _lock(self, file: BinaryIO) -> None:
        """Keep other processes out; the lock ends with the process, however that ends."""
        try:
            import fcntl
        except ImportError:  # not on Windows, where the open file itself cannot be removed
            return
        try:
            fcntl.flock(file, fcntl.LOCK_EX | fcntl.LOCK_NB)
        except OSError:
            raise InputError(f"{self.folder}: another run is at work on it; wait for it or stop it") from None

    def _check_basis(self) -> None:
        file = self.folder / BASIS
        if not file.exists():
            part = file.with_suffix(".part")
            part.write_text(json.dumps(self._basis, indent=2), encoding="utf-8")
            part.replace(file)
            return
        try:
            before = json.loads(file.read_text(encoding="utf-8"))
        except ValueError:
            before = {}
        names = [*before, *(name for name in self._basis if name not in before)]
        changed = [name for name in names if before.get(name) != self._basis.get(name)]
        if changed:
            raise InputError(
                f"{self.folder}: holds an unfinished study from which {name} has changed since"
                f"{_shown(before.get(name), self._basis.get(name))}; undo that to go on, or say --restart to begin anew"
                for name in changed
            )

    def _read(self, file: BinaryIO) -> None:
        """Find every whole line and cut off one that is not."""
        file.seek(0)
        end = 0
        for line in file:
            point = _point_of(line, self.points)
            if point is None:
                break
            self._at[point] = end
            end += len(line)
        file.truncate(end)
        file.seek(end)


def _point_of(line: bytes, points: int) -> int | None:
    if not line.endswith(b"\n"):
        return None
    try:
        point = json.loads(line)["point"]
    except (ValueError, KeyError, TypeError):
        return None
    return point if isinstance(point, int) and 0 <= point < points else None


def _shown(before: Any, now: Any) -> str:
    """Show two values when they are short enough to tell something."""
    short = all(isinstance(each, str | int | float) and len(str(each)) <= 40 for each in (before, now))
    return f" ({before} then, {now} now)" if short and before != now else ""
