"""Maxwell Garnett's effective medium: spheres in a host."""

from __future__ import annotations

from filmstack.materials.material import Material
from filmstack.materials.models.mixture import Mixture, checked_fractions
from filmstack.wave.series import Number


class MaxwellGarnett(Mixture):
    """The first constituent is the host."""

    def mixed(self, permittivities: list[Number]) -> Number:
        """Return eps = host (1 + 3 f b / (1 - f b)), b the polarizability of a sphere over its volume."""
        host, spheres = permittivities
        share = float(self.fractions[1])
        polarizability = (spheres - host) / (spheres + 2.0 * host)
        return host * (1.0 + 2.0 * share * polarizability) / (1.0 - share * polarizability)


def maxwell_garnett(host: Material, inclusion: Material, fraction: float, *, label: str | None = None) -> Material:
    """Return a host with dilute spherical inclusions.

    Parameters
    ----------
    host, inclusion : Material
        The medium around and inside the spheres.
    fraction : float
        Volume fraction of the inclusions, 0 to 1; the rule is meant for small ones. [1]
    label : str, optional
        Name for people.

    Returns
    -------
    Material

    Raises
    ------
    ArgumentError
        If fractions are negative or do not sum to 1, or the ranges do not overlap.

    Notes
    -----
    J. C. Maxwell Garnett, Phil. Trans. R. Soc. A 203, 385 (1904).

    Examples
    --------
    >>> from filmstack.materials.models.constant import constant
    >>> complex(maxwell_garnett(constant(1.5), constant(1.0), 0.1).index(550.0)).real.__round__(5)
    1.44914
    """
    materials = [host, inclusion]
    return MaxwellGarnett(materials, checked_fractions(materials, [1.0 - fraction, fraction]), "Maxwell Garnett", label)
