"""The page that opens a bundle: the stack as a sketch, ten numbers, definitions, what lies where."""

from collections.abc import Iterator, Mapping, Sequence
from textwrap import wrap
from typing import TYPE_CHECKING

from optics.assumptions import length_text
from optics.output.handoff_columns import Number, Sheet
from optics.output.handoff_formats import Contents
from optics.output.numbers import decimals_for

if TYPE_CHECKING:
    from optics.fate.solve import Result
    from optics.stack import Layer, Outer, Stack

WIDTH = 110
BORN = "share of the photons born: "
ON_THE_PAGE = 10
LEADING = (
    "trapped",
    "taken_back",
    "held",
    "free_above",
    "free_below",
    "elsewhere",
    "guided_elsewhere",
    "rate_factor",
    "radiative_factor_wide",
    "inplane_median_um",
    "p_r_wide",
    "p_e_wide",
    "ray_trapped",
)
"""Numbers for the page, the first ten that there are."""

DEFINITIONS = (
    "Shares are of the photons born, at one wavelength or averaged with birth_weight.",
    "trapped = reabsorbed + waveguided. The cut between the two is a convention; their sum is not.",
    "P, the rate factor: emission rate in this stack over that in the bulk of the film's material.",
    "p_r: taken back by the film and makes carriers; p_e: leaves and counts; p_a: lost; they add to one.",
    "Readings: faces (held light is lost), wide (no edges, held light followed to its end), sphere (what reaches "
    "the edge counts as out). With p_r goes P times the bulk's radiative rate; with p_r_bulk the bulk's rate itself.",
    "In the plane: per_um_radius is the share a unit of radius, per_cm2 an area around the spot, line_per_cm a line "
    "through it, averaged over cells on both sides. Take the one of your geometry; they are not proportional.",
    "Depth: share of the births in one slice that the film takes back in another; z = 0 at the film's upper face.",
    "Empty cells (nan, null): not a number, or without bound.",
)

OPENED_WITH = {
    "csv": "CSV in data/, described by datapackage.json (Frictionless Data Package): "
    'pandas.read_csv("data/outcomes.csv")',
    "xlsx": 'bundle.xlsx: a sheet a table, "columns" says what each is',
    "mat": "bundle.mat: struct photonfate, fields <table>_<column>; fields_field, fields_column, fields_unit, "
    "fields_meaning say what each is",
    "json": 'bundle.json: numbers, and tables[name]["columns"][column]["values"]',
    "hdf5": "bundle.h5: a group a table, a dataset a column, attributes unit and meaning",
}


def page(
    result: "Result",
    contents: Contents,
    *,
    kind: str,
    warnings: Sequence[str],
    left_out: Mapping[str, int],
    version: str,
) -> str:
    """Return the page.

    Parameters
    ----------
    result
        What was solved.
    contents
        The contents of the bundle.
    kind
        Its format.
    warnings
        Sentences.
    left_out
        Tables that were left out, with their size in bytes.
    version
        Of this tool.
    """
    stack = result.stack
    tool = f"Photonfate {version}".rstrip()
    advised, error = result.advised_model, result.numerical_error
    parts = [
        [stack.title or "A stack without a title", f"Bundle for recycling, diffusion and device models; {tool}"],
        list(sketch(stack)),
        list(ten(contents.numbers, advised=advised, numerical_error=error)),
        _wrapped("Warnings", warnings),
        _wrapped("Definitions", DEFINITIONS),
        list(_files(contents.sheets, kind, left_out)),
    ]
    return "\n\n".join("\n".join(lines) for lines in parts if lines) + "\n"


def sketch(stack: "Stack") -> Iterator[str]:
    """Yield the stack as a drawing in text, from above to below."""
    wide = max(len(layer.name) for layer in stack.layers)
    thick = [length(layer) for layer in stack.layers]
    room = max(map(len, thick))
    yield f"      {_outer(stack.above, 'above')}"
    for layer, size in zip(stack.layers, thick, strict=True):
        marks = [word for word, on in (("births", layer.emits), ("plate, without phases", layer.plate)) if on]
        said = f"  ({', '.join(marks)})" if marks else ""
        yield f"  {'-' * (WIDTH - 4)}"
        yield f"   {'*' if layer.emits else ' '}  {layer.name:<{wide}}  {size:>{room}}  {layer.material.name}{said}"
    yield f"  {'-' * (WIDTH - 4)}"
    yield f"      {_outer(stack.below, 'below')}"


def length(layer: "Layer") -> str:
    """Return a layer's thickness as people write it."""
    return length_text(layer.thickness_nm)


def _outer(outer: "Outer", side: str) -> str:
    return f"{side}: {outer.material.name} ({'free space' if outer.free else 'holds the light that enters it'})"


def ten(numbers: Sequence[Number], *, advised: str, numerical_error: float) -> Iterator[str]:
    """Yield the ten leading numbers with what they mean, and how far to trust them."""
    found = {each.column.name: each for each in numbers}
    chosen = [found[name] for name in LEADING if name in found and found[name].value == found[name].value]
    wide = max(len(each.column.name) for each in chosen)
    yield "Averages over all photons born"
    for each in chosen[:ON_THE_PAGE]:
        share = each.column.unit == "1"
        value = f"{each.value:.{decimals_for(numerical_error)}f}" if share else f"{each.value:.4g} {each.column.unit}"
        yield f"  {each.column.name:<{wide}}  {value:>10}  {each.column.meaning.removeprefix(BORN)}"
    yield f"Numerical error of the shares: {numerical_error:.0e} (inputs not counted). Advised model: {advised}."


def _wrapped(head: str, sentences: Sequence[str]) -> list[str]:
    lines = [line for each in sentences for line in wrap(f"- {each}", WIDTH - 2, subsequent_indent="  ")]
    return [head, *(f"  {line}" for line in lines)] if lines else []


def _files(sheets: Sequence[Sheet], kind: str, left_out: Mapping[str, int]) -> Iterator[str]:
    yield "What lies where"
    yield from (f"  {line}" for line in wrap(OPENED_WITH[kind], WIDTH - 2, subsequent_indent="  "))
    wide = max(len(sheet.name) for sheet in sheets)
    for sheet in sheets:
        yield f"  {sheet.name:<{wide}}  {sheet.rows:>6} rows  {sheet.title}"
    for name, size in left_out.items():
        yield f"  left out, {size / 1e6:.1f} MB: {name}; --full keeps it"
    yield "  stack.toml with its tables: `photonfate solve` on this folder computes it again"
    yield "  methods.md, references.bib: a paragraph, the layers and sources for a paper's supplement"
    yield "  run.json: versions, hashes of inputs and files"
