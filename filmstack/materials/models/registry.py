"""The dispersion models by name, and the shipped formula entries built from them.

A new model is one file in this folder and one line here; the tests loop over the table.
"""

from __future__ import annotations

import tomllib
from collections.abc import Mapping
from dataclasses import dataclass
from functools import cache
from importlib import import_module
from typing import TYPE_CHECKING, Any

from filmstack.materials.material import Material, Provenance, Thermal
from filmstack.materials.shipped import shipped_folder

if TYPE_CHECKING:
    from collections.abc import Callable


@dataclass(frozen=True)
class Model:
    """A kind of medium that can be made from parameters."""

    maker: str
    """Name of the module of this folder and of its function."""
    kramers_kronig: bool
    """n and k are a Kramers-Kronig pair at all energies."""
    mixture: bool = False
    """Made of other materials."""

    def make(self) -> Callable[..., Material]:
        """Return the maker."""
        function: Callable[..., Material] = getattr(
            import_module(f"filmstack.materials.models.{self.maker}"), self.maker
        )
        return function


MODELS: Mapping[str, Model] = {
    "constant": Model("constant", kramers_kronig=False),
    "sellmeier": Model("sellmeier", kramers_kronig=False),
    "sellmeier-rational": Model("sellmeier_rational", kramers_kronig=False),
    "cauchy": Model("cauchy", kramers_kronig=False),
    "power-series": Model("power_series", kramers_kronig=False),
    "gas": Model("gas", kramers_kronig=False),
    "lorentz": Model("lorentz", kramers_kronig=True),
    "drude": Model("drude", kramers_kronig=True),
    "lorentz-drude": Model("lorentz_drude", kramers_kronig=True),
    "brendel-bormann": Model("brendel_bormann", kramers_kronig=False),
    "tauc-lorentz": Model("tauc_lorentz", kramers_kronig=True),
    "forouhi-bloomer": Model("forouhi_bloomer", kramers_kronig=False),
    "urbach-tail": Model("urbach_tail", kramers_kronig=False, mixture=True),
    "moist-air": Model("moist_air", kramers_kronig=False),
    "aluminium-gallium-arsenide": Model("aluminium_gallium_arsenide", kramers_kronig=False),
    "bruggeman": Model("bruggeman", kramers_kronig=False, mixture=True),
    "maxwell-garnett": Model("maxwell_garnett", kramers_kronig=False, mixture=True),
    "lorentz-lorenz": Model("lorentz_lorenz", kramers_kronig=False, mixture=True),
}

_DESCRIPTION = {
    "label", "material", "form", "temperature", "range_nm", "source", "licence", "status", "notes", "index_of",
    "dn_dt_per_k", "dn_dt_reference_c", "dn_dt_range_c", "dn_dt_range_nm", "expansion_per_k", "thermal_source",
    "model", "check_points", "published_points",
}  # fmt: skip
"""Keys of an entry that are not parameters of its model."""


@cache
def formula_entries() -> Mapping[str, Mapping[str, Any]]:
    """Return the shipped formula entries by key."""
    with (shipped_folder("materials") / "dispersion.toml").open("rb") as file:
        entries: dict[str, dict[str, Any]] = tomllib.load(file)["material"]
    return entries


N_ONLY = {"sellmeier", "sellmeier-rational", "cauchy", "power-series"}
"""Models that give n alone."""


def _notes(entry: Mapping[str, Any]) -> tuple[str, ...]:
    notes: list[str] = list(entry.get("notes", ()))
    if entry["model"] in N_ONLY and not any(note.startswith("n only") for note in notes):
        notes.append("n only: k is taken as 0")
    return tuple(notes)


def entry_provenance(key: str, entry: Mapping[str, Any]) -> Provenance:
    """Return where the numbers of a shipped entry come from."""
    low, high = entry["range_nm"]
    return Provenance(
        key=key,
        label=entry["label"],
        source=entry["source"],
        form=entry["form"],
        range_nm=(float(low), float(high)),
        temperature=entry["temperature"],
        status=f"{entry['status']}; index {entry['index_of']}",
        notes=_notes(entry),
    )


def build_formula(key: str, entry: Mapping[str, Any]) -> Material:
    """Return the material of a shipped formula entry."""
    parameters = {name: value for name, value in entry.items() if name not in _DESCRIPTION}
    if entry["index_of"] == "relative to air":
        parameters["relative_to_air"] = True
    made = MODELS[entry["model"]].make()(**parameters, provenance=entry_provenance(key, entry))
    if "dn_dt_per_k" in entry:
        made.thermal = Thermal(
            dn_dt_per_k=entry["dn_dt_per_k"],
            reference_c=entry["dn_dt_reference_c"],
            range_c=tuple(entry["dn_dt_range_c"]),
            range_nm=tuple(entry["dn_dt_range_nm"]),
            expansion_per_k=entry["expansion_per_k"],
            source=entry["thermal_source"],
        )
    return made
