"""Solar cells: how warm they get, and their current-voltage curve from the figures of a data sheet."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from pvlib import pvsystem
from pvlib.ivtools.sdm import fit_desoto_batzelis

from ..types import FloatArray

REAR_HEAT_LOSS = {"open": (25.0, 6.84, 1.0), "deck": (17.0, 6.84, 0.5), "insulated": (11.0, 6.84, 0.5)}
"""Heat loss in still air [W/(m² K)], its growth with wind, and the share of the wind that reaches the panel.

Published: Faiman, Prog. Photovolt. 16 (2008) 307, for the open rack. Deck and insulated: common practice,
after rises of 0.042 and 0.056 K per W/m² in 1 m/s at the panel.
"""

STC_W_M2, STC_C = 1000.0, 25.0


def cell_temp_c(plane_w_m2: FloatArray, air_c: FloatArray, wind_m_s: FloatArray, *, u0: float, u1: float) -> FloatArray:
    """Cell temperature from the heat balance of a panel in wind.

    Parameters
    ----------
    plane_w_m2 : (n_times, ...)
        Irradiance on the panel plane [W/m²], at least 0. NaN stays NaN.
    air_c, wind_m_s : broadcastable to plane_w_m2
        Air temperature [°C] and wind speed at the panel [m/s].
    u0, u1 : float
        Heat loss [W/(m² K)] in still air, and its growth with wind [W/(m² K) per m/s].

    Returns
    -------
    Cell temperature [°C], in the broadcast shape of the inputs.

    Raises
    ------
    ValueError
        u0 is not above 0.

    Source
    ------
    Published: Faiman, Prog. Photovolt. 16 (2008) 307.
    """
    if not u0 > 0.0:
        raise ValueError(f"u0 = {u0} is not above 0")
    return np.asarray(air_c + plane_w_m2 / (u0 + u1 * wind_m_s))


@dataclass(frozen=True)
class OneDiode:
    """Single-diode parameters of a panel, or of panels wired together, at 1000 W/m² and 25 °C.

    photo_a, dark_a : light-generated and saturation current [A]. series_ohm, shunt_ohm : resistances [Ω].
    slope_v : ideality x cells x thermal voltage [V]. photo_a_per_k : growth of photo_a [A/K].
    leaks : false: the shunt resistance grows as 1/light, as in sound cells; true: it stays, as in cells with defects.
    """

    photo_a: float
    dark_a: float
    series_ohm: float
    shunt_ohm: float
    slope_v: float
    photo_a_per_k: float
    leaks: bool = False

    def at(self, cells_w_m2: FloatArray, temp_c: FloatArray, *, extra_ohm: float = 0.0) -> tuple[FloatArray, ...]:
        """Photo current, saturation current, series and shunt resistance, slope, each in the shape of the light.

        Parameters
        ----------
        cells_w_m2 : (...)
            Light the cells can use [W/m²].
        temp_c : (...)
            Cell temperature [°C].
        extra_ohm : float
            Resistance in series outside the panel [Ω].

        Source
        ------
        Published: De Soto, Klein & Beckman, Solar Energy 80 (2006) 78.
        """
        photo, dark, series, shunt, slope = pvsystem.calcparams_desoto(
            np.asarray(cells_w_m2, dtype=float),
            np.asarray(temp_c, dtype=float),
            alpha_sc=self.photo_a_per_k,
            a_ref=self.slope_v,
            I_L_ref=self.photo_a,
            I_o_ref=self.dark_a,
            R_sh_ref=self.shunt_ohm,
            R_s=self.series_ohm,
        )
        return photo, dark, series + extra_ohm, np.full_like(photo, self.shunt_ohm) if self.leaks else shunt, slope

    def wired(self, in_series: int, in_parallel: int) -> OneDiode:
        """Several of these, strings of ``in_series`` side by side."""
        return replace(
            self,
            photo_a=self.photo_a * in_parallel,
            dark_a=self.dark_a * in_parallel,
            series_ohm=self.series_ohm * in_series / in_parallel,
            shunt_ohm=self.shunt_ohm * in_series / in_parallel,
            slope_v=self.slope_v * in_series,
            photo_a_per_k=self.photo_a_per_k * in_parallel,
        )


def peak(cell: OneDiode, cells_w_m2: FloatArray, temp_c: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Maximum power [W] and the voltage at it [V]; light [W/m²] above 0, in its shape."""
    shape = np.broadcast_shapes(np.shape(cells_w_m2), np.shape(temp_c))
    parameters = cell.at(np.broadcast_to(cells_w_m2, shape).ravel(), np.broadcast_to(temp_c, shape).ravel())
    found = pvsystem.max_power_point(*parameters, method="newton")
    return np.reshape(found["p_mp"], shape), np.reshape(found["v_mp"], shape)


def current_a(
    cell: OneDiode, cells_w_m2: FloatArray, temp_c: FloatArray, *, volts: float, extra_ohm: float = 0.0
) -> FloatArray:
    """Current [A] at a voltage behind a resistance in series; negative where the voltage pushes back into the panel.

    Parameters
    ----------
    cell : OneDiode
        The panel.
    cells_w_m2, temp_c : (...)
        Light the cells can use [W/m²] and cell temperature [°C].
    volts : float
        Held beyond the resistance [V].
    extra_ohm : float
        Wire between panel and that point [Ω].
    """
    return np.asarray(pvsystem.i_from_v(volts, *cell.at(cells_w_m2, temp_c, extra_ohm=extra_ohm)))


def fit_one_diode(
    *,
    watts: float,
    vmp_v: float,
    imp_a: float,
    voc_v: float,
    isc_a: float,
    voc_pct_per_k: float,
    isc_pct_per_k: float,
) -> OneDiode:
    """Single-diode parameters of one panel from its data sheet, with exactly its name-plate power.

    Parameters
    ----------
    watts : float
        Name-plate power [W].
    vmp_v, imp_a, voc_v, isc_a : float
        Data sheet at 1000 W/m² and 25 °C [V, A].
    voc_pct_per_k, isc_pct_per_k : float
        Temperature coefficients [%/K].

    Raises
    ------
    ValueError
        No cell has such figures.

    Source
    ------
    Published: Batzelis & Papathanassiou, IEEE Trans. Sustain. Energy 7 (2016) 504.
    """
    with np.errstate(all="ignore"):  # figures of no cell overflow on the way and are refused below
        found = fit_desoto_batzelis(
            vmp_v, imp_a, voc_v, isc_a, isc_a * isc_pct_per_k / 100.0, voc_v * voc_pct_per_k / 100.0
        )
    cell = OneDiode(
        photo_a=float(found["I_L_ref"]),
        dark_a=float(found["I_o_ref"]),
        series_ohm=float(found["R_s"]),
        shunt_ohm=float(found["R_sh_ref"]),
        slope_v=float(found["a_ref"]),
        photo_a_per_k=float(found["alpha_sc"]),
    )
    positive = (cell.photo_a, cell.dark_a, cell.shunt_ohm, cell.slope_v)
    if not all(np.isfinite(x) and x > 0.0 for x in positive) or not cell.series_ohm >= 0.0:
        raise ValueError(f"no cell has {vmp_v} V and {imp_a} A between {voc_v} V open and {isc_a} A short")
    return scaled_to(cell, watts)


def scaled_to(cell: OneDiode, watts: float) -> OneDiode:
    """The same curve with its currents stretched so that maximum power at 1000 W/m² and 25 °C is ``watts``."""
    by = watts / float(peak(cell, np.array([STC_W_M2]), np.array([STC_C]))[0][0])
    return replace(
        cell,
        photo_a=cell.photo_a * by,
        dark_a=cell.dark_a * by,
        series_ohm=cell.series_ohm / by,
        shunt_ohm=cell.shunt_ohm / by,
        photo_a_per_k=cell.photo_a_per_k * by,
    )


def with_shunt(cell: OneDiode, shunt_ohm: float) -> OneDiode:
    """The panel with a leak [Ω] that does not close in dim light, still of its name-plate power: cheap cells fade.

    Raises
    ------
    ValueError
        So low a shunt leaves no such power.
    """
    watts = float(peak(cell, np.array([STC_W_M2]), np.array([STC_C]))[0][0])
    for _ in range(40):  # stretching the currents moves the shunt, so that both settle together
        cell = scaled_to(replace(cell, shunt_ohm=shunt_ohm, leaks=True), watts)
        if abs(cell.shunt_ohm / shunt_ohm - 1.0) < 1e-9:
            return cell
    raise ValueError(f"a shunt of {shunt_ohm} ohm leaves no {watts:g} W")
