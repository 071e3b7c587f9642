"""Methods for a paper's supplement: a paragraph, the layers with their sources, and BibTeX."""

import re
from collections.abc import Iterator, Mapping, Sequence
from typing import TYPE_CHECKING

import numpy as np

from optics.media.dispersion import Constant
from optics.output.handoff_text import length
from optics.radiation import FromAbsorption
from optics.spectrum import Gaussian, SpectrumTable

if TYPE_CHECKING:
    from optics.fate.solve import Result
    from optics.media.material import Material
    from optics.stack import Stack

REFERENCES = {
    "chance1978": """@article{chance1978,
  author = {Chance, R. R. and Prock, A. and Silbey, R.},
  title = {Molecular Fluorescence and Energy Transfer Near Interfaces},
  journal = {Adv. Chem. Phys.}, volume = {37}, pages = {1--65}, year = {1978},
  doi = {10.1002/9780470142561.ch1}
}""",
    "lukosz1977": """@article{lukosz1977,
  author = {Lukosz, W. and Kunz, R. E.},
  title = {Light emission by magnetic and electric dipoles close to a plane interface. {I}. Total radiated power},
  journal = {J. Opt. Soc. Am.}, volume = {67}, pages = {1607--1615}, year = {1977},
  doi = {10.1364/JOSA.67.001607}
}""",
    "neyts1998": """@article{neyts1998,
  author = {Neyts, Kristiaan A.},
  title = {Simulation of light emission from thin-film microcavities},
  journal = {J. Opt. Soc. Am. A}, volume = {15}, pages = {962--971}, year = {1998},
  doi = {10.1364/JOSAA.15.000962}
}""",
    "benisty1998": """@article{benisty1998,
  author = {Benisty, H. and Stanley, R. and Mayer, M.},
  title = {Method of source terms for dipole emission modification in modes of arbitrary planar structures},
  journal = {J. Opt. Soc. Am. A}, volume = {15}, pages = {1192--1201}, year = {1998},
  doi = {10.1364/JOSAA.15.001192}
}""",
    "yeh1988": """@book{yeh1988,
  author = {Yeh, Pochi}, title = {Optical Waves in Layered Media}, publisher = {Wiley}, year = {1988}
}""",
    "roosbroeck1954": """@article{roosbroeck1954,
  author = {van Roosbroeck, W. and Shockley, W.},
  title = {Photon-Radiative Recombination of Electrons and Holes in Germanium},
  journal = {Phys. Rev.}, volume = {94}, pages = {1558--1560}, year = {1954},
  doi = {10.1103/PhysRev.94.1558}
}""",
    "kirchartz2016": """@article{kirchartz2016,
  author = {Kirchartz, Thomas and Staub, Florian and Rau, Uwe},
  title = {Impact of Photon Recycling on the Open-Circuit Voltage of Metal Halide Perovskite Solar Cells},
  journal = {ACS Energy Lett.}, volume = {1}, pages = {731--739}, year = {2016},
  doi = {10.1021/acsenergylett.6b00223}
}""",
}
PLANE = (
    "In-plane distances at which the film takes photons back were found mode by mode for guided light (poles of the "
    "power density, their residues as shares of the births) and from rays in closed form for the rest; the matrix over "
    "the film's depth from the fields of births in each of its slices; both add to the shares above."
)
DOI = re.compile(r"\b10\.\d{4,9}/[^\s;,]+")
LAST_OF_A_DOI = ".)]}"


def methods_text(result: "Result", *, assumptions: Sequence[str], version: str) -> str:
    """Return the methods: Markdown with citation keys of ``references_text``.

    Parameters
    ----------
    result
        What was solved.
    assumptions
        Sentences on every choice that shapes the numbers.
    version
        Of this tool.
    """
    stack = result.stack
    parts = ["# Methods", paragraph(result, version=version)]
    parts += ["\n".join(layer_table(result)), "Further choices:", "\n".join(f"- {line}" for line in assumptions)]
    if _keys(stack):
        parts += ["Sources of n and k:", "\n".join(_sources(stack))]
    return "\n\n".join(parts) + "\n"


def paragraph(result: "Result", *, version: str) -> str:
    """Return how the numbers came about, in a paragraph."""
    stack = result.stack
    first, last = stack.light.range_nm
    count = stack.light.wavelengths_nm.size
    tool = f"Photonfate {version}".rstrip()
    said = [
        f"Where photons born in the film end was computed with {tool} for the stack of the table, at "
        f"{count} wavelength{'s' if count > 1 else ''} from {first:g} to {last:g} nm.",
        _births(stack),
        _model(result),
        *_found(result),
        PLANE,
        "Readings of the shares as p_r, p_e and p_a, and what they do to radiative rates, follow [@kirchartz2016].",
    ]
    if result.radiation is not None:
        kelvin = f"{result.radiation.temperature_K:g} K"
        said.append(f"Radiative rates follow from the film's absorption at {kelvin} [@roosbroeck1954].")
    return " ".join(said)


def _model(result: "Result") -> str:
    if result.table is None:
        return (
            "The film is thick against the coherence length of its light, so rays were traced in closed form with the "
            "power coefficients of the thin layers beside it from transfer matrices [@yeh1988]."
        )
    return (
        f"Emission was that of classical dipoles, a share of {result.stack.emission.horizontal_share:.4g} of them in "
        "the plane, in a layered medium [@chance1978; @lukosz1977; @neyts1998; @benisty1998]; layers up to 20 um carry "
        "phases by transfer matrices [@yeh1988], thicker ones (plates) intensities."
    )


def _found(result: "Result") -> Iterator[str]:
    averages = result.averages
    yield (
        f"Of all photons born {averages['trapped']:.1%} are not handed out of the thin layers (taken back by the film "
        f"at once or guided), {averages['substrate'] + averages['cover']:.1%} are held in plates or outer media, "
        f"{averages['free_above']:.1%} leave above and {averages['free_below']:.1%} below, and "
        f"{averages['elsewhere']:.1%} are absorbed elsewhere."
    )
    if result.table is not None:
        factor = averages["rate_factor"]
        yield f"The mean emission rate over that in the bulk of the film's material is {factor:.4f}."
    yield f"The estimated numerical error of these shares is {result.numerical_error:.0e}, inputs not counted."


def layer_table(result: "Result") -> Iterator[str]:
    """Yield the layers as a Markdown table, with n and k where most photons are born."""
    stack = result.stack
    table = result.ray_table if result.table is None else result.table
    peak = int(np.argmax(table["births_per_nm"].to_numpy()))
    at = float(table["wavelength_nm"].iloc[peak])
    keys = {name: key for key, name in _keys(stack).items()}
    yield f"| from above | thickness | material | n at {at:g} nm | k at {at:g} nm | source |"
    yield "|---|---|---|---|---|---|"
    rows = [("above", "", stack.above.material)]
    births = {True: " (births)", False: ""}
    rows += [(layer.name + births[layer.emits], length(layer), layer.material) for layer in stack.layers]
    rows.append(("below", "", stack.below.material))
    columns = [name for name in result.index.columns if name != "wavelength_nm"]
    for place, (name, thickness, material) in enumerate(rows):
        n, k = (float(result.index[columns[2 * place + part]].iloc[peak]) for part in (0, 1))
        source = f"[@{keys[material.name]}]" if material.name in keys else ""
        yield f"| {_cell(name)} | {thickness} | {_cell(material.name)} | {n:.4f} | {k:.3e} | {source} |"


def references_text(result: "Result") -> str:
    """Return BibTeX of the methods and of every material that names a source."""
    wanted = set(re.findall(r"@(\w+)", paragraph(result, version="")))
    entries = [text for key, text in REFERENCES.items() if key in wanted]
    materials = _materials(result.stack)
    entries += [_entry(key, materials[name]) for key, name in _keys(result.stack).items()]
    return "\n\n".join(entries) + "\n"


def _births(stack: "Stack") -> str:
    spectrum = stack.light.spectrum
    if isinstance(spectrum, Gaussian):
        shape = f"a Gaussian around {spectrum.peak_nm:g} nm, {spectrum.fwhm_nm:g} nm wide at half height"
    elif isinstance(spectrum, FromAbsorption):
        shape = f"that which follows from the film's absorption at {spectrum.temperature_K:g} K [@roosbroeck1954]"
    else:
        shape = "a table" if isinstance(spectrum, SpectrumTable) else "as given"
    seen = "" if spectrum.seen == "inside" else f"as seen {spectrum.seen} and traced back to "
    own = f"The emission spectrum was {shape}, {seen}the film material's own"
    return f"{own}; births in the stack follow it times the rate factor."


def _materials(stack: "Stack") -> Mapping[str, "Material"]:
    materials = [stack.above.material, *(layer.material for layer in stack.layers), stack.below.material]
    return {material.name: material for material in materials}


def _keys(stack: "Stack") -> dict[str, str]:
    """Return BibTeX keys of the materials that name a source; a number in the stack file is none."""
    keys: dict[str, str] = {}
    for name, material in _materials(stack).items():
        if material.source and not isinstance(material.medium, Constant):
            plain = re.sub(r"[^a-z0-9]+", "-", name.lower()).strip("-") or "material"
            key, number = f"material-{plain}", 2
            while key in keys:
                key, number = f"material-{plain}-{number}", number + 1
            keys[key] = name
    return keys


def _sources(stack: "Stack") -> Iterator[str]:
    materials = _materials(stack)
    for key, name in _keys(stack).items():
        material = materials[name]
        licence = f" Licence: {material.licence}." if material.licence else ""
        hashed = f" SHA-256 {material.sha256}." if material.sha256 else ""
        yield f"- [@{key}] {material.title or name}: {material.source}.{licence}{hashed}"


def _entry(key: str, material: "Material") -> str:
    fields = {"title": material.title or material.name, "howpublished": material.source}
    doi = DOI.search(material.source)
    if doi:
        fields["doi"] = doi.group().rstrip(LAST_OF_A_DOI)
    if material.sha256:
        fields["note"] = f"n and k as used: SHA-256 {material.sha256}"
    body = ",\n".join(f"  {name} = {{{text if name == 'doi' else _tex(text)}}}" for name, text in fields.items())
    return f"@misc{{{key},\n{body}\n}}"


def _tex(text: str) -> str:
    """Return text whose special signs TeX prints instead of obeying."""
    kept = text.replace("\\", "/").replace("{", "(").replace("}", ")")
    return re.sub(r"([&%$#_])", r"\\\1", kept).replace("~", r"\textasciitilde{}").replace("^", r"\textasciicircum{}")


def _cell(text: str) -> str:
    return text.replace("|", r"\|")
