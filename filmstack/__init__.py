"""Optical coatings: materials, designs, spectra and what follows from them.

Importing this package loads the standard library only. Every public name is found in the table
below and its module is imported on first use, so that a short command never waits for a compiler
or a plotting library. A new public name is one line of the table.
"""

from __future__ import annotations

from importlib import import_module
from typing import Any

__version__ = "0.1.0"

_WHERE = {
    # errors
    "FilmstackError": "errors",
    "ArgumentError": "errors",
    "CoherenceError": "errors",
    "DesignFileError": "errors",
    "MaterialFileError": "errors",
    "MaterialNotFoundError": "errors",
    "MaterialRangeError": "errors",
    # materials
    "Material": "materials.material",
    "material": "materials.library",
    "list_materials": "materials.library",
    "constant": "materials.models.constant",
    "sellmeier": "materials.models.sellmeier",
    "sellmeier_rational": "materials.models.sellmeier_rational",
    "cauchy": "materials.models.cauchy",
    "power_series": "materials.models.power_series",
    "gas": "materials.models.gas",
    "lorentz": "materials.models.lorentz",
    "drude": "materials.models.drude",
    "lorentz_drude": "materials.models.lorentz_drude",
    "brendel_bormann": "materials.models.brendel_bormann",
    "tauc_lorentz": "materials.models.tauc_lorentz",
    "forouhi_bloomer": "materials.models.forouhi_bloomer",
    "urbach_tail": "materials.models.urbach_tail",
    "moist_air": "materials.models.moist_air",
    "aluminium_gallium_arsenide": "materials.models.aluminium_gallium_arsenide",
    "bruggeman": "materials.models.bruggeman",
    "maxwell_garnett": "materials.models.maxwell_garnett",
    "lorentz_lorenz": "materials.models.lorentz_lorenz",
    # stacks and designs
    "Layer": "stack",
    "Plate": "stack",
    "Stack": "stack",
    "Design": "design",
    "load_design": "design",
    "save_design": "design",
    # analysis
    "spectrum": "analysis.spectrum",
    "Spectrum": "analysis.spectrum",
    "batch_spectrum": "analysis.batch",
    "batch_blocks": "analysis.batch",
    "thickness_gradient": "analysis.gradients",
    "index_gradient": "analysis.gradients",
    "needle_gradient": "analysis.gradients",
    "ellipsometry": "analysis.ellipsometry",
    "Ellipsometry": "analysis.ellipsometry",
    "admittance_locus": "analysis.admittance",
    "AdmittanceLocus": "analysis.admittance",
    "field": "analysis.field",
    "Field": "analysis.field",
    "phase": "analysis.phase",
    "Phase": "analysis.phase",
    "transmission_peaks": "analysis.peaks",
    "Peaks": "analysis.peaks",
    "Peak": "analysis.peaks",
}

__all__ = ["__version__", *sorted(_WHERE)]


def __getattr__(name: str) -> Any:  # noqa: ANN401 - any public object
    """Import the module that holds `name` and return the object."""
    if name not in _WHERE:
        raise AttributeError(f"module 'filmstack' has no attribute {name!r}")
    value = getattr(import_module(f"filmstack.{_WHERE[name]}"), name)
    globals()[name] = value
    return value


def __dir__() -> list[str]:
    """List the public names, loaded or not."""
    return list(__all__)
