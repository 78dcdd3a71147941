"""Conduction through cylindrical layers, with conductivity depending on temperature."""

from math import pi
from typing import Self

import numpy as np

from cladwatt.errors import InputError
from cladwatt.types import FloatArray, FloatLike

__all__ = [
    "ConductivityIntegral",
    "critical_radius",
    "cylinder_resistance",
    "equivalent_thickness",
    "fin_length",
]


class ConductivityIntegral:
    """Conductivity linear between nodes, and its exact integral over temperature.

    Parameters
    ----------
    temperature_nodes : (n,) array
        Strictly increasing. [K]
    conductivity_nodes : (n,) array
        Positive. [W/(m K)]

    Raises
    ------
    InputError
        If the nodes are not finite, increasing and of equal number, or a conductivity is not
        positive.

    Notes
    -----
    Beyond the first and last node the conductivity stays what it is there. With the integral
    Theta (Kirchhoff's transform) a layer obeys Theta(T1) - Theta(T2) = q' ln(r2/r1) / (2 pi)
    exactly, whatever the curve between the faces [1]_.

    References
    ----------
    .. [1] Carslaw, Jaeger, *Conduction of Heat in Solids*, 2nd edition, Oxford, 1959,
       section 1.6.

    Examples
    --------
    >>> wool = ConductivityIntegral([300.0, 400.0], [0.04, 0.06])
    >>> round(float(wool.mean(400.0, 300.0)), 6)
    0.05
    """

    def __init__(
        self,
        temperature_nodes: FloatArray | list[float],
        conductivity_nodes: FloatArray | list[float],
    ) -> None:
        nodes = np.array(temperature_nodes, dtype=np.float64)
        values = np.array(conductivity_nodes, dtype=np.float64)
        _check_nodes(nodes, values)
        slopes = np.diff(values) / np.diff(nodes)
        pieces = np.diff(nodes) * 0.5 * (values[1:] + values[:-1])
        areas = np.concatenate(([0.0], np.cumsum(pieces)))
        self.temperature_nodes = nodes
        self.conductivity_nodes = values
        self._area_nodes = areas
        # one segment more at either end: constant conductivity beyond the nodes
        self._start = np.concatenate((nodes[:1], nodes))
        self._value = np.concatenate((values[:1], values))
        self._area = np.concatenate((areas[:1], areas))
        self._slope = np.concatenate(([0.0], slopes, [0.0]))

    @classmethod
    def constant(cls, conductivity: float) -> Self:
        """Conductivity that does not depend on temperature.

        Parameters
        ----------
        conductivity : float
            [W/(m K)]

        Returns
        -------
        ConductivityIntegral
        """
        return cls([273.15], [conductivity])

    def conductivity(self, temperature: FloatLike) -> FloatArray:
        """Conductivity at a temperature.

        Parameters
        ----------
        temperature : float or array
            [K]

        Returns
        -------
        array
            [W/(m K)]
        """
        return np.asarray(np.interp(temperature, self.temperature_nodes, self.conductivity_nodes))

    def integral(self, temperature: FloatLike) -> FloatArray:
        """Integral of the conductivity from the first node to a temperature.

        Parameters
        ----------
        temperature : float or array
            [K]

        Returns
        -------
        array
            Negative below the first node. [W/m]
        """
        kelvin = np.asarray(temperature, dtype=np.float64)
        if self.temperature_nodes.size == 1:
            return np.asarray((kelvin - self._start[0]) * self._value[0])
        part = np.searchsorted(self.temperature_nodes, kelvin)
        step = kelvin - self._start[part]
        mean = self._value[part] + 0.5 * self._slope[part] * step
        return np.asarray(self._area[part] + mean * step)

    def inverse(self, integral: FloatLike) -> FloatArray:
        """Temperature at which the integral has a value.

        Parameters
        ----------
        integral : float or array
            [W/m]

        Returns
        -------
        array
            [K]
        """
        area = np.asarray(integral, dtype=np.float64)
        if self.temperature_nodes.size == 1:
            return np.asarray(self._start[0] + area / self._value[0])
        part = np.searchsorted(self._area_nodes, area)
        rest, value = area - self._area[part], self._value[part]
        # the root of the segment's quadratic in the form without cancellation
        root = np.sqrt(value * value + 2.0 * self._slope[part] * rest)
        return np.asarray(self._start[part] + 2.0 * rest / (value + root))

    def mean(self, first: FloatLike, second: FloatLike) -> FloatArray:
        """Mean conductivity between two temperatures, by the integral.

        Parameters
        ----------
        first, second : float or array
            Temperatures in either order; equal ones give the conductivity there. [K]

        Returns
        -------
        array
            [W/(m K)]
        """
        one = np.asarray(first, dtype=np.float64)
        other = np.asarray(second, dtype=np.float64)
        difference = one - other
        is_near = np.abs(difference) < 1e-3
        ratio = (self.integral(one) - self.integral(other)) / np.where(is_near, 1.0, difference)
        return np.asarray(np.where(is_near, self.conductivity(0.5 * (one + other)), ratio))


def cylinder_resistance(
    inner_diameter: FloatLike, outer_diameter: FloatLike, conductivity: FloatLike
) -> FloatArray:
    """Thermal resistance of a cylindrical layer, per metre of pipe.

    Parameters
    ----------
    inner_diameter, outer_diameter : float or array
        [m]
    conductivity : float or array
        Mean between the faces. [W/(m K)]

    Returns
    -------
    array
        ln(D2/D1) / (2 pi k). [m K/W]

    References
    ----------
    .. [1] ISO 12241:2008, *Thermal insulation for building equipment and industrial
       installations*, linear thermal resistance of a hollow cylinder.
    """
    ratio = np.asarray(outer_diameter, dtype=np.float64) / inner_diameter
    return np.asarray(np.log(ratio) / (2.0 * pi * np.asarray(conductivity)))


def equivalent_thickness(inner_diameter: FloatLike, thickness: FloatLike) -> FloatArray:
    """Thickness of the flat slab with the same resistance per outer area.

    Parameters
    ----------
    inner_diameter, thickness : float or array
        [m]

    Returns
    -------
    array
        r2 ln(r2/r1). [m]
    """
    inner = 0.5 * np.asarray(inner_diameter, dtype=np.float64)
    outer = inner + thickness
    return np.asarray(outer * np.log(outer / inner))


def critical_radius(conductivity: FloatLike, coefficient: FloatLike) -> FloatArray:
    """Outer radius below which thicker lagging loses more.

    Parameters
    ----------
    conductivity : float or array
        Of the lagging. [W/(m K)]
    coefficient : float or array
        Total surface coefficient, taken as constant. [W/(m2 K)]

    Returns
    -------
    array
        k/h. [m]

    References
    ----------
    .. [1] Incropera, DeWitt, Bergman, Lavine, *Fundamentals of Heat and Mass Transfer*, 6th
       edition, Wiley, 2007, example 3.5.
    """
    return np.asarray(np.asarray(conductivity, dtype=np.float64) / coefficient)


def fin_length(
    thickness: FloatLike, sheet_conductivity: FloatLike, total_coefficient: FloatLike
) -> FloatArray:
    """Distance over which cladding spreads heat along itself.

    Parameters
    ----------
    thickness : float or array
        Of the sheet. [m]
    sheet_conductivity : float or array
        [W/(m K)]
    total_coefficient : float or array
        Convection plus radiation outside, plus what the lagging under it conducts per area.
        [W/(m2 K)]

    Returns
    -------
    array
        sqrt(k t / h): a disturbance falls to 1/e over this length. [m]

    References
    ----------
    .. [1] Incropera, DeWitt, Bergman, Lavine, *Fundamentals of Heat and Mass Transfer*, 6th
       edition, Wiley, 2007, section 3.6 (infinite fin, one side giving off heat).
    """
    sheet = np.asarray(thickness, dtype=np.float64) * sheet_conductivity
    return np.asarray(np.sqrt(sheet / total_coefficient))


def _check_nodes(nodes: FloatArray, values: FloatArray) -> None:
    if nodes.ndim != 1 or nodes.size == 0 or nodes.shape != values.shape:
        raise InputError(
            f"{nodes.shape} temperatures and {values.shape} conductivities; "
            "expected two lists of the same length, at least one"
        )
    if not (np.all(np.isfinite(nodes)) and np.all(np.diff(nodes) > 0)):
        raise InputError(f"temperatures are {nodes.tolist()} K; expected finite and increasing")
    if not np.all((values > 0) & np.isfinite(values)):
        raise InputError(
            f"conductivities are {values.tolist()} W/(m K); expected finite and above 0"
        )
