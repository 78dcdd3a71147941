"""Steps through the lagging: as specified, sound, and as found."""

import math
from dataclasses import replace
from itertools import pairwise

import numpy as np

from cladwatt.explain.gap_steps import GAP_CURVE, Gap, gap_steps
from cladwatt.explain.inside_steps import inside_steps
from cladwatt.explain.steps import Pad, Section, source_of
from cladwatt.explain.surface_steps import exchange_steps
from cladwatt.explain.tracer_steps import tracer_steps
from cladwatt.inverse.outer_balance import outer_flux
from cladwatt.inverse.seen import Seen
from cladwatt.inverse.sound import SoundDraws, film_resistance
from cladwatt.inverse.tracing import Stripe
from cladwatt.physics.conduction import ConductivityIntegral, cylinder_resistance
from cladwatt.physics.lagged_pipe import LaggingLayer, lagging_resistance_from_surface
from cladwatt.types import FloatArray

__all__ = ["lagging_sections", "result_section"]

CARSLAW = "Carslaw and Jaeger, section 1.6"
ISO_12241 = "ISO 12241, hollow cylinder"


def lagging_sections(seen: Seen, sound: SoundDraws) -> tuple[Section, Section]:
    """Return the lagging as specified and as sound, solved in the frame's conditions.

    Parameters
    ----------
    seen : Seen
        With one draw.
    sound : SoundDraws
        What the engine found.
    """
    line = seen.line_draws
    assert line.layers is not None
    installed = tuple(
        replace(layer, factor=np.asarray(layer.factor) * line.installation_factor)
        for layer in line.layers
    )
    pad = Pad()
    _given(pad, seen)
    _Through(pad, seen, line.layers, sound.specified_loss, "_spec").write()
    specified = pad.section("specified")
    pad = Pad()
    factor = seen.line.installation_factor.source
    pad.given("installation_factor", "f_inst", line.installation_factor, "-", factor)
    through = sound.heat_loss / (1 + line.supports_allowance)
    _Through(pad, seen, installed, through, "_sound").write()
    if line.supports_allowance.any():
        source = seen.line.supports_allowance.source
        pad.given("supports_allowance", "s_sup", line.supports_allowance, "-", source)
        pad.found("sound_loss", "q'_sound", sound.heat_loss, "W/m", "(1 + s_sup) q'_lag_sound",
                  "s_sup q'_lag_sound")  # fmt: skip
    return specified, pad.section("sound")


def _given(pad: Pad, seen: Seen) -> None:
    """Write down the inside of the pipe, and what an overridden diameter has left out."""
    line = seen.line_draws
    inside_steps(pad, seen)
    film = film_resistance(line)
    if seen.region.outside_diameter is not None:
        source = source_of(seen.line.pipe_outside_diameter, "")
        pad.given("pipe_diameter", "d", _known(line.pipe_diameter), "m", source)
        assert line.layers is not None
        for number, layer in enumerate(line.layers, start=1):
            source = source_of(seen.line.layers[number - 1].thickness, "")
            pad.given("layer_thickness", f"t_{number}", layer.thickness, "m", source)
    if film is not None:
        source = source_of(seen.line.inside_film, "")
        pad.given("film_coefficient", "h_in", _known(line.film_coefficient), "W/(m² K)", source)
        pad.found("film_resistance", "R_film", film, "m K/W", "1 / (pi d h_in)", "d h_in")


def _known(draws: FloatArray | None) -> FloatArray:
    assert draws is not None
    return draws


class _Through:
    """The way of the heat through lagging, for a loss that the engine has solved."""

    def __init__(
        self,
        pad: Pad,
        seen: Seen,
        layers: tuple[LaggingLayer, ...],
        heat_loss: FloatArray,
        suffix: str,
    ) -> None:
        self.pad, self.seen, self.layers = pad, seen, layers
        self.heat_loss, self.suffix = heat_loss, suffix
        self.is_sound = suffix == "_sound"

    def write(self) -> None:
        """Write down temperatures, resistances, the loss, and for sound lagging the check."""
        pad, suffix, film = self.pad, self.suffix, film_resistance(self.seen.line_draws)
        wall = _known(self.seen.line_draws.inside_temperature)
        first, total = "T_in", ""
        if film is not None:
            wall, first, total = wall - film * self.heat_loss, f"T_wall{suffix}", "R_film + "
        temperatures, resistances = self.marched(wall)
        faces = [first, *(f"T_{number}{suffix}" for number in range(1, len(self.layers)))]
        faces.append(f"T_s{suffix}")
        how = "solved together with the surface's balance" + ", checked below" * self.is_sound
        if film is not None:
            pad.given("wall_temperature", first, wall, "K", how)
        for number, (symbol, value) in enumerate(zip(faces[1:], temperatures[1:], strict=True), 1):
            key = "solved_surface" if number == len(self.layers) else "solved_interface"
            pad.given(key, symbol, value, "K", how)
        for number, ends in enumerate(pairwise(faces)):
            self.layer(number, ends, temperatures[number : number + 2], resistances[number])
        sum_of = " + ".join(f"R_{number}{suffix}" for number in range(1, len(self.layers) + 1))
        if len(self.layers) > 1:
            pad.found("lagging_resistance", f"R{suffix}", sum(resistances), "m K/W", sum_of,
                      sum_of.replace(" + ", " "))  # fmt: skip
            sum_of = f"R{suffix}"
        formula = f"(T_in - {faces[-1]}) / ({total}{sum_of})"
        inputs = f"T_in {faces[-1]} {total.replace('+', '')}{sum_of}"
        plain = not (self.is_sound and self.seen.line_draws.supports_allowance.any())
        symbol, key = f"q'{suffix}" if plain else f"q'_lag{suffix}", "specified_loss"
        if self.is_sound:
            key = "sound_loss" if plain else "lagging_loss"
        pad.found(key, symbol, self.heat_loss, "W/m", formula, inputs)
        if self.is_sound:
            self.check(float(temperatures[-1][0]), symbol)

    def marched(self, wall: FloatArray) -> tuple[list[FloatArray], list[FloatArray]]:
        """Return the temperatures from the pipe outwards and each layer's resistance."""
        temperatures, resistances = [wall], []
        inner = _known(self.seen.line_draws.pipe_diameter)
        for layer in self.layers:
            outer = inner + 2 * np.asarray(layer.thickness)
            shape = cylinder_resistance(inner, outer, layer.factor)
            conductivity, inner = layer.conductivity, outer
            integral = conductivity.integral(temperatures[-1]) - self.heat_loss * shape
            temperatures.append(conductivity.inverse(integral))
            resistances.append(shape / conductivity.mean(*temperatures[-2:]))
        return temperatures, resistances

    def layer(
        self,
        number: int,
        ends: tuple[str, str],
        temperatures: list[FloatArray],
        resistance: FloatArray,
    ) -> None:
        """Write down one layer's mean conductivity and resistance; `number` from 0."""
        (hot, cold), conductivity = ends, self.layers[number].conductivity
        is_gap = self.seen.line.layers[number].kind == "air_gap"
        pad, suffix, one = self.pad, self.suffix, number + 1
        specified = self.seen.line_draws.layers
        assert specified is not None
        factors = "f_inst " if self.is_sound else ""
        own = np.asarray(specified[number].factor)
        if (own != 1).any():
            factors += f"f_{one} "
            if not self.is_sound:
                source = self.seen.line.layers[number].conductivity_factor.source
                pad.given("conductivity_factor", f"f_{one}", own, "-", source)
        curve = _curve(conductivity, *temperatures)
        pad.found("mean_conductivity", f"k_{one}{suffix}", conductivity.mean(*temperatures),
                  "W/(m K)", f"mean of k(T) between {hot} and {cold}; {curve}", f"{hot} {cold}",
                  GAP_CURVE if is_gap else CARSLAW)  # fmt: skip
        if is_gap and self.is_sound:
            gap_steps(pad, self.gap(one, ends, temperatures))
        inner = "d" + "".join(f" + 2 t_{below}" for below in range(1, one))
        thick = " ".join(f"t_{below}" for below in range(1, one + 1))
        pad.found(
            "layer_resistance", f"R_{one}{suffix}", resistance, "m K/W",
            f"ln(({inner} + 2 t_{one}) / ({inner})) / (2 pi {factors}k_{one}{suffix})",
            f"d {thick} {factors}k_{one}{suffix}", ISO_12241,
        )  # fmt: skip

    def gap(self, number: int, ends: tuple[str, str], temperatures: list[FloatArray]) -> Gap:
        """Return a layer that is an air gap, `number` from 1."""
        inner = np.asarray(_known(self.seen.line_draws.pipe_diameter))
        for layer in self.layers[: number - 1]:
            inner = inner + 2 * np.asarray(layer.thickness)
        outer = inner + 2 * np.asarray(self.layers[number - 1].thickness)
        declared = self.seen.line.layers[number - 1]
        return Gap(number, declared, ends, (temperatures[0], temperatures[1]), (inner, outer))

    def check(self, surface_temperature: float, symbol: str) -> None:
        """Write down that the surface gives off what is conducted."""
        seen = self.seen
        exchange = seen.line_draws.exchange(seen.frame, _known(seen.line_draws.lagged_diameter))
        exchange_steps(self.pad, surface_temperature, exchange, seen.vapour, suffix=self.suffix)
        flux = outer_flux(np.array([surface_temperature]), exchange, seen.vapour)
        loss = math.pi * np.asarray(exchange.diameter) * flux
        self.pad.found("closes", "q'_check", loss, "W/m",
                       f"pi D q_sound, to be compared with {symbol}", "D q_sound")  # fmt: skip


def _curve(conductivity: ConductivityIntegral, *faces: FloatArray) -> str:
    """Return as text those nodes of a conductivity curve that lie between two faces, or next."""
    at, k = conductivity.temperature_nodes, conductivity.conductivity_nodes
    first = max(int(np.searchsorted(at, np.min(faces), side="right")) - 1, 0)
    last = int(np.searchsorted(at, np.max(faces))) + 1
    nodes = zip(at[first:last], k[first:last], strict=True)
    listed = ", ".join(f"{value:.7g} at {temperature:g} K" for temperature, value in nodes)
    return f"k = {listed}, straight between"


def result_section(
    seen: Seen,
    sound: SoundDraws | None,
    heat_loss: float,
    surface_temperature: float,
    stripe: Stripe | None = None,
) -> Section | None:
    """Return the resistance found and what it is compared with.

    Parameters
    ----------
    seen : Seen
        With one draw.
    sound : SoundDraws or None
    heat_loss : float
        At the station. [W/m]
    surface_temperature : float
        Mean over the seen face of the station. [K]
    stripe : Stripe or None
        Of a traced line.

    Returns
    -------
    Section or None
        None where the inside temperature is unknown.
    """
    line = seen.line_draws
    if line.inside_temperature is None:
        return None
    pad = Pad()
    if sound is None:
        inside_steps(pad, seen)
    found = lagging_resistance_from_surface(line.inside_temperature, surface_temperature, heat_loss)
    formula, inputs = "(T_in - T_face) / q'", "T_in T_face q'"
    film = film_resistance(line)
    if film is not None and sound is not None:
        found, formula, inputs = found - film, f"{formula} - R_film", f"{inputs} R_film"
    pad.found("resistance", "R", found, "m K/W", formula, inputs)
    if sound is not None:
        several = "R_spec" if line.layers is not None and len(line.layers) > 1 else "R_1_spec"
        ratio = found / sound.specified_resistance
        pad.found("resistance_ratio", "ratio", ratio, "-", f"R / {several}", f"R {several}")
    if stripe is not None:
        tracer_steps(pad, seen, stripe, heat_loss)
    if sound is not None and (stripe is None or stripe.is_split):
        untraced, symbol = heat_loss, "q'"
        if stripe is not None:
            untraced, symbol = float(stripe.untraced(np.array([heat_loss]))[0]), "q'_off"
        pad.found("excess", "excess", untraced - sound.heat_loss, "W/m", f"{symbol} - q'_sound",
                  f"{symbol} q'_sound")  # fmt: skip
    return pad.section("result")
