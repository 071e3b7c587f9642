"""What an audit shows."""

from textwrap import wrap
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from optics.study.audit import Audit, Check

WIDTH = 112


def report(found: "Audit") -> str:
    """Return an audit as a table: verdict, check, figure, bound, and what was compared."""
    wide = max((len(check.name) for check in found.checks), default=5) + 2
    lines = [found.title, ""] if found.title else []
    lines.append(f"{'':<6}{'check':<{wide}}{'figure':>10}{'bound':>10}")
    for check in found.checks:
        lines += _lines(check, wide)
    failed = list(dict.fromkeys(check.name for check in found.checks if check.verdict == "FAIL"))
    lines += [
        "",
        f"Failed: {', '.join(failed)}" if failed else "Every check passed; notes are for the reader to judge.",
    ]
    return "\n".join(lines)


def _lines(check: "Check", wide: int) -> list[str]:
    head = f"{check.verdict:<6}{check.name:<{wide}}{_number(check.figure):>10}{_number(check.bound):>10}"
    return [head.rstrip(), *(f"{'':<8}{line}" for line in wrap(check.said, WIDTH - 8))]


def _number(value: float | None) -> str:
    if value is None:
        return "-"
    return f"{value:.2g}" if abs(value) < 1e-3 or abs(value) >= 1e4 else f"{value:.3g}"
