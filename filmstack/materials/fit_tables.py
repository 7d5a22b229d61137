"""Fit the splines of the shipped tables: `python -m filmstack.materials.fit_tables`.

Run it after a table was added or changed; a test notices if it was forgotten. The file it writes
saves every later program the fit, and scipy.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from filmstack.files.atomic import atomic_writer
from filmstack.materials.interpolation import SplineCurve
from filmstack.materials.shipped import shipped_folder
from filmstack.materials.tables import CURVES, read_header, shipped_table, text_hash

if TYPE_CHECKING:
    from filmstack.arraytypes import AnyArray


def fit_tables() -> dict[str, AnyArray]:
    """Fit every shipped table.

    Returns
    -------
    dict
        For each table, by the name of its file: hash of its text, deviation of the derivatives, and knots
        and coefficients of the spline of n unless n follows the monotone cubic, which needs none.
    """
    arrays: dict[str, AnyArray] = {}
    for path in sorted(shipped_folder("materials").glob("*.csv")):
        table = shipped_table(read_header(path)["key"], fitted=False)
        arrays[f"{path.stem}.hash"] = np.array(text_hash(path.read_text(encoding="utf-8")))
        # logarithms in half precision: a deviation right to one per cent
        arrays[f"{path.stem}.deviation"] = np.log10(table.deviation).astype(np.float16)
        if isinstance(table.n_curve, SplineCurve):
            arrays[f"{path.stem}.knots"] = table.n_curve.knots
            arrays[f"{path.stem}.coefficients"] = table.n_curve.coefficients
    return arrays


def main() -> None:
    """Fit and write the file of curves."""
    with atomic_writer(shipped_folder("materials") / CURVES, "wb") as file:
        np.savez(file, allow_pickle=False, **fit_tables())


if __name__ == "__main__":
    main()
