"""Photonfate: where light born in a thin film goes.

Import what you need from here. A name is loaded when it is first used, so that importing the package costs nothing.
"""

from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from optics.collection import Collection
    from optics.depth import Decay, DepthTable, Pump, Sheet
    from optics.errors import InputError
    from optics.fate.implied import yields_of
    from optics.fate.overlay import lay_over
    from optics.fate.sampled import Sampled, sampled
    from optics.fate.solve import Result, solve
    from optics.light import Light
    from optics.media.cabinet import bundled_names
    from optics.media.cabinet import find as find_material
    from optics.media.fitness import fitness_of as check_material
    from optics.media.importing import import_table
    from optics.media.labfile import read_table
    from optics.media.material import Material
    from optics.media.tail import Tail
    from optics.output.handoff import write_handoff
    from optics.output.result import write_result
    from optics.output.transport import write_indepth, write_inplane, write_receivers
    from optics.radiation import FromAbsorption, equilibrium_rate
    from optics.sample import NearField, PerWavelength, Sample
    from optics.spectrum import Gaussian, SpectrumTable
    from optics.stack import Emission, Layer, Outer, Stack
    from optics.stackfile.reading import parse_stack, read_stack
    from optics.stackfile.writing import write_stack
    from optics.study.audit import audit
    from optics.study.compare import compare
    from optics.study.inputs import input_uncertainty
    from optics.study.spread import tolerance
    from optics.study.sweep import sweep
    from optics.tolerances import Alternatives, Tolerance
    from optics.transport.depth import InDepth, indepth
    from optics.transport.guided import guided_modes
    from optics.transport.handover import Handover, hand_over
    from optics.transport.inplane import InPlane, inplane
    from optics.transport.receivers import Receivers, receivers

    __version__: str

__all__ = [
    "Alternatives",
    "Collection",
    "Decay",
    "DepthTable",
    "Emission",
    "FromAbsorption",
    "Gaussian",
    "Handover",
    "InDepth",
    "InPlane",
    "InputError",
    "Layer",
    "Light",
    "Material",
    "NearField",
    "Outer",
    "PerWavelength",
    "Pump",
    "Receivers",
    "Result",
    "Sample",
    "Sampled",
    "Sheet",
    "SpectrumTable",
    "Stack",
    "Tail",
    "Tolerance",
    "audit",
    "bundled_names",
    "check_material",
    "compare",
    "equilibrium_rate",
    "find_material",
    "guided_modes",
    "hand_over",
    "import_table",
    "indepth",
    "inplane",
    "input_uncertainty",
    "lay_over",
    "parse_stack",
    "read_stack",
    "read_table",
    "receivers",
    "sampled",
    "solve",
    "sweep",
    "tolerance",
    "write_handoff",
    "write_indepth",
    "write_inplane",
    "write_receivers",
    "write_result",
    "write_stack",
    "yields_of",
]

_HOMES = {
    "Alternatives": "optics.tolerances:Alternatives",
    "Collection": "optics.collection:Collection",
    "Decay": "optics.depth:Decay",
    "DepthTable": "optics.depth:DepthTable",
    "Emission": "optics.stack:Emission",
    "FromAbsorption": "optics.radiation:FromAbsorption",
    "Gaussian": "optics.spectrum:Gaussian",
    "Handover": "optics.transport.handover:Handover",
    "InDepth": "optics.transport.depth:InDepth",
    "InPlane": "optics.transport.inplane:InPlane",
    "InputError": "optics.errors:InputError",
    "Layer": "optics.stack:Layer",
    "Light": "optics.light:Light",
    "Material": "optics.media.material:Material",
    "NearField": "optics.sample:NearField",
    "Outer": "optics.stack:Outer",
    "PerWavelength": "optics.sample:PerWavelength",
    "Pump": "optics.depth:Pump",
    "Receivers": "optics.transport.receivers:Receivers",
    "Result": "optics.fate.solve:Result",
    "Sample": "optics.sample:Sample",
    "Sampled": "optics.fate.sampled:Sampled",
    "Sheet": "optics.depth:Sheet",
    "SpectrumTable": "optics.spectrum:SpectrumTable",
    "Stack": "optics.stack:Stack",
    "Tail": "optics.media.tail:Tail",
    "Tolerance": "optics.tolerances:Tolerance",
    "audit": "optics.study.audit:audit",
    "bundled_names": "optics.media.cabinet:bundled_names",
    "check_material": "optics.media.fitness:fitness_of",
    "compare": "optics.study.compare:compare",
    "equilibrium_rate": "optics.radiation:equilibrium_rate",
    "find_material": "optics.media.cabinet:find",
    "guided_modes": "optics.transport.guided:guided_modes",
    "hand_over": "optics.transport.handover:hand_over",
    "import_table": "optics.media.importing:import_table",
    "indepth": "optics.transport.depth:indepth",
    "inplane": "optics.transport.inplane:inplane",
    "input_uncertainty": "optics.study.inputs:input_uncertainty",
    "lay_over": "optics.fate.overlay:lay_over",
    "parse_stack": "optics.stackfile.reading:parse_stack",
    "read_stack": "optics.stackfile.reading:read_stack",
    "read_table": "optics.media.labfile:read_table",
    "receivers": "optics.transport.receivers:receivers",
    "sampled": "optics.fate.sampled:sampled",
    "solve": "optics.fate.solve:solve",
    "sweep": "optics.study.sweep:sweep",
    "tolerance": "optics.study.spread:tolerance",
    "write_handoff": "optics.output.handoff:write_handoff",
    "write_indepth": "optics.output.transport:write_indepth",
    "write_inplane": "optics.output.transport:write_inplane",
    "write_receivers": "optics.output.transport:write_receivers",
    "write_result": "optics.output.result:write_result",
    "write_stack": "optics.stackfile.writing:write_stack",
    "yields_of": "optics.fate.implied:yields_of",
}


def __getattr__(name: str) -> Any:
    if name == "__version__":
        from importlib.metadata import version

        return version("photonfate")
    if name not in _HOMES:
        raise AttributeError(f"module {__name__!r} has no attribute {name!r}")
    from importlib import import_module

    module, _, attribute = _HOMES[name].partition(":")
    value = getattr(import_module(module), attribute)
    globals()[name] = value
    return value


def __dir__() -> list[str]:
    return sorted({*globals(), *__all__, "__version__"})
