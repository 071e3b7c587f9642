"""The stack file: TOML to `Stack` and back, every fault with its file, layer and key."""

from optics.stackfile.reading import parse_stack, read_stack
from optics.stackfile.tables import build_stack
from optics.stackfile.writing import write_stack

__all__ = ["build_stack", "parse_stack", "read_stack", "write_stack"]
