"""Rest voltage by state of charge of the four chemistries, and where their loads are cut by default."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

Chemistry = Literal["lifepo4", "li-ion", "nimh", "lead-acid"]

_NODES = (0.0, 0.05, 0.10, 0.20, 0.30, 0.40, 0.50, 0.60, 0.70, 0.80, 0.90, 0.95, 1.0)


@dataclass(frozen=True)
class RestVoltage:
    """Rest voltage of one cell at 25 °C, joined linearly between nodes.

    soc : states of charge, 0 to 1, ascending; cell_v : rest voltage of a cell there [V], ascending
    nominal_v : what people call the cell's voltage [V], for messages
    cutoff_soc, restart_soc : where loads are dropped and come back when the file does not say
    """

    soc: tuple[float, ...]
    cell_v: tuple[float, ...]
    nominal_v: float
    cutoff_soc: float
    restart_soc: float


REST_VOLTAGES: dict[str, RestVoltage] = {
    # Published: Safari & Delacourt, J. Electrochem. Soc. 158 (2011) A562, open-circuit curve of LFP on graphite.
    "lifepo4": RestVoltage(
        soc=_NODES,
        cell_v=(2.708, 3.089, 3.199, 3.252, 3.283, 3.302, 3.309, 3.313, 3.324, 3.338, 3.345, 3.352, 3.422),
        nominal_v=3.2,
        cutoff_soc=0.10,
        restart_soc=0.25,
    ),
    # Published: Chen et al., J. Electrochem. Soc. 167 (2020) 080534, NMC811 on graphite, window 3.0 to 4.2 V.
    "li-ion": RestVoltage(
        soc=_NODES,
        cell_v=(3.000, 3.233, 3.392, 3.507, 3.605, 3.682, 3.767, 3.852, 3.957, 4.048, 4.097, 4.125, 4.200),
        nominal_v=3.6,
        cutoff_soc=0.10,
        restart_soc=0.25,
    ),
    # From memory; freshly off charge a little above.
    "nimh": RestVoltage(
        soc=_NODES,
        cell_v=(1.05, 1.16, 1.19, 1.22, 1.235, 1.245, 1.25, 1.26, 1.27, 1.285, 1.31, 1.34, 1.40),
        nominal_v=1.2,
        cutoff_soc=0.10,
        restart_soc=0.25,
    ),
    # From memory: 11.7, 12.0, 12.25, 12.55, 12.85 V of a pack of six cells.
    "lead-acid": RestVoltage(
        soc=(0.0, 0.25, 0.50, 0.75, 1.0),
        cell_v=(11.7 / 6, 12.0 / 6, 12.25 / 6, 12.55 / 6, 12.85 / 6),
        nominal_v=2.0,
        cutoff_soc=0.50,
        restart_soc=0.60,
    ),
}
"""By chemistry. The cut-off and restart shares are common practice."""


def rest_voltage_v(chemistry: str, soc: float, cells_in_series: int) -> float:
    """Rest voltage [V] of a pack at a state of charge from 0 to 1, linear between the nodes."""
    curve = REST_VOLTAGES[chemistry]
    for low, high, low_v, high_v in zip(curve.soc, curve.soc[1:], curve.cell_v, curve.cell_v[1:], strict=False):
        if soc <= high:
            return cells_in_series * (low_v + (high_v - low_v) * (soc - low) / (high - low))
    return cells_in_series * curve.cell_v[-1]


ALSO_CALLED: dict[str, str] = {
    **dict.fromkeys(("lfp", "life", "lifepo", "lithiumironphosphate", "ironphosphate"), "lifepo4"),
    **dict.fromkeys(("lipo", "lithiumpolymer", "lithiumion", "nmc", "linmc", "nca", "lco", "licoo2"), "li-ion"),
    **dict.fromkeys(
        ("lead", "pb", "pbacid", "agm", "gel", "sla", "vrla", "flooded", "leadgel", "leadagm"), "lead-acid"
    ),
    "nickelmetalhydride": "nimh",
}
"""The four chemistries by the letters and digits of other names they go by; common practice. What is not here has no
near one: cells that are charged as another kind can burn."""


def chemistry_meant(name: str) -> str | None:
    """The chemistry that another name, or another spelling, stands for; None where none does for sure."""
    plain = _letters(name)
    return {_letters(known): known for known in REST_VOLTAGES}.get(plain) or ALSO_CALLED.get(plain)


def _letters(name: str) -> str:
    return "".join(sign for sign in name.lower() if sign.isalnum())


def chemistries_in_words() -> str:
    """The choices with the voltage of a cell, by which people know theirs."""
    return ", ".join(f'"{name}" (cells of {curve.nominal_v:.1f} V)' for name, curve in REST_VOLTAGES.items())
