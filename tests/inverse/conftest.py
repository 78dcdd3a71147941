"""A pipe seen square on, its image made by the measurement equation read forwards.

One horizontal pipe along the middle row, nothing uncertain unless a test says so. The image is
exact: per pixel the directional emissivity at the angle of that pixel, the mirrored and the
air's radiance, no blur and no noise. What is found must then be what was put in.
"""

import math
from collections.abc import Callable
from dataclasses import dataclass, field, replace
from typing import Any

import numpy as np
import pytest

from cladwatt.inverse.conclude import conclude
from cladwatt.inverse.draws import DrawBook
from cladwatt.inverse.frame_draws import FrameDraws, draw_frame
from cladwatt.inverse.line_draws import LineDraws, draw_line
from cladwatt.inverse.observe import Observed, observe_region
from cladwatt.inverse.region_estimate import estimate_regions
from cladwatt.inverse.result import RegionResult
from cladwatt.inverse.seen import FrameImage
from cladwatt.inverse.water_draws import WaterDraws
from cladwatt.measure.noise import FrameNoise
from cladwatt.physics.band import Band
from cladwatt.physics.conduction import ConductivityIntegral
from cladwatt.physics.emissivity import directional_emissivity
from cladwatt.physics.lagged_pipe import (
    LaggedPipeState,
    LaggingLayer,
    SurfaceExchange,
    solve_lagged_pipe,
    surface_heat_flux,
)
from cladwatt.quantities import Quantity, Remark
from cladwatt.survey.model import (
    AccuracyStatement,
    Camera,
    Cladding,
    Conditions,
    ConductivityCurve,
    Layer,
    Line,
    Site,
)
from cladwatt.survey.region import Region

ROWS, COLUMNS, AXIS_ROW = 96, 280, 48.0
WIDTH = 48.0
"""Of the pipe. [px]"""
FIRST, LAST = 20.0, 260.0
CONDUCTIVITY = 0.045


def pipe_region(**changes: Any) -> Region:
    fields: dict[str, Any] = {
        "centreline": ((FIRST, AXIS_ROW), (LAST, AXIS_ROW)),
        "widths": (WIDTH, WIDTH),
    } | changes
    return Region("r1", "f1", "pipe", "HS-1", **fields)


def box(name: str, role: Any, left: float, top: float, right: float, bottom: float, **rest: Any):
    """A rectangle drawn with a role."""
    ring = ((left, top), (right, top), (right, bottom), (left, bottom))
    return Region(name, "f1", role, outline=ring, **rest)


def hot_line(**changes: Any) -> Line:
    """60 mm of lagging on a 114.3 mm pipe at 180 °C, painted; nothing uncertain."""
    wool = ConductivityCurve((250.0, 600.0), (CONDUCTIVITY, CONDUCTIVITY))
    fields: dict[str, Any] = {
        "pipe_outside_diameter": Quantity(0.1143),
        "layers": (Layer("wool", Quantity(0.060), wool, Quantity(1.0)),),
        "cladding": painted(),
        "installation_factor": Quantity(1.15),
        "inside_temperature": Quantity(453.15),
    } | changes
    return Line("HS-1", **fields)


def painted(emissivity: float = 0.92, u: float = 0.0, **changes: Any) -> Cladding:
    fields: dict[str, Any] = {
        "name": "painted",
        "thickness": Quantity(0.001),
        "band_emissivity": Quantity(emissivity, u, lower=0.01, upper=0.99),
        "total_emissivity": Quantity(0.90),
        "solar_absorptance": Quantity(0.6),
        "conductivity": 50.0,
        "is_metal": False,
    } | changes
    return Cladding(**fields)


def hall(**changes: Any) -> Conditions:
    """Indoors at 20 °C, surroundings at 22 °C, a slight draught; nothing uncertain."""
    fields: dict[str, Any] = {
        "air_temperature": Quantity(293.15),
        "surroundings_temperature": Quantity(295.15),
        "reflected_temperature": Quantity(296.15),
        "atmosphere_transmission": Quantity(0.98),
        "wind_speed": Quantity(0.2),
        "indoors": True,
    } | changes
    return Conditions(**fields)


def exact_water(count: int) -> WaterDraws:
    """Water of 0.96 that covers from half a kelvin below the dew point; 0.2 mm after rain."""
    return WaterDraws(*(np.full(count, value) for value in (0.96, 0.96, 0.5, 2e-4)))


@dataclass(frozen=True)
class Bench:
    """A line, a frame and a region, and what comes out of them."""

    line: Line = field(default_factory=hot_line)
    conditions: Conditions = field(default_factory=hall)
    camera: Camera = field(
        default_factory=lambda: Camera(
            field_of_view_deg=30.0, accuracy=AccuracyStatement(0.0, 0.0), spot_pixels=2.0
        )
    )
    region: Region = field(default_factory=pipe_region)
    site: Site = field(default_factory=Site)
    seed: int = 1
    count: int = 200
    law_exact: bool = True
    """Whether the convection law, and what water does, are taken as exact."""
    noise: float = 0.0
    """Of a pixel. [K]"""
    optics: Any = None
    """Radiance and temperature that make the image; those of the camera's band where None."""

    def but(self, **changes: Any) -> "Bench":
        return replace(self, **changes)

    @property
    def band(self) -> Any:
        return Band.rectangular(*self.camera.band) if self.optics is None else self.optics

    @property
    def book(self) -> DrawBook:
        return DrawBook(self.seed, self.count)

    def frame_draws(self) -> FrameDraws:
        frame = draw_frame(self.book, "f1", self.conditions, self.camera, self.site)
        assert frame is not None
        if self.law_exact:
            frame = replace(
                frame, convection_factor=np.ones(self.count), water=exact_water(self.count)
            )
        return frame

    def line_draws(self) -> LineDraws:
        return draw_line(self.book, self.line, self.region)

    @property
    def exchange(self) -> SurfaceExchange:
        """What the surface exchanges heat with, every value as declared."""
        conditions, cladding = self.conditions, self.line.cladding
        assert conditions.air_temperature is not None
        assert conditions.surroundings_temperature is not None
        assert conditions.wind_speed is not None
        diameter = self.line.lagged_diameter
        assert diameter is not None
        return SurfaceExchange(
            conditions.air_temperature.value,
            conditions.surroundings_temperature.value,
            conditions.wind_speed.value,
            diameter,
            cladding.total_emissivity.value,
            relative_humidity=(
                None if conditions.relative_humidity is None else conditions.relative_humidity.value
            ),
            inclination_deg=self.line.inclination_deg,
        )

    def loss(self, surface_temperature: float) -> float:
        """Loss of a surface at one temperature all round. [W/m]"""
        exchange = self.exchange
        return float(np.pi * exchange.diameter * surface_heat_flux(surface_temperature, exchange))

    def solved(self, factor: float) -> LaggedPipeState:
        """The pipe with its lagging's conductivity times a factor."""
        line = self.line
        assert line.inside_temperature is not None
        assert line.pipe_outside_diameter is not None
        layers = []
        for layer in line.layers:
            assert layer.thickness is not None
            assert layer.conductivity is not None
            curve = ConductivityIntegral(
                np.asarray(layer.conductivity.temperature),
                np.asarray(layer.conductivity.conductivity),
            )
            layers.append(LaggingLayer(curve, layer.thickness.value, factor))
        return solve_lagged_pipe(
            line.inside_temperature.value, line.pipe_outside_diameter.value, layers, self.exchange
        )

    @property
    def sound(self) -> LaggedPipeState:
        """The pipe as sound as its installation factor says."""
        return self.solved(self.line.installation_factor.value)

    def lens(
        self, surface_temperature: Any, *, emissivity: float | None = None, mirrored: Any = None
    ) -> np.ndarray:
        """The image at the lens. [K]

        `surface_temperature` is a number, one per column, or (ROWS, 1); `mirrored` likewise what
        is mirrored in place of the declared reflected temperature.
        """
        band, conditions = self.band, self.conditions
        assert conditions.air_temperature is not None
        assert conditions.reflected_temperature is not None
        assert conditions.atmosphere_transmission is not None
        air = conditions.air_temperature.value
        reflected = conditions.reflected_temperature.value if mirrored is None else mirrored
        transmission = conditions.atmosphere_transmission.value
        across = (np.arange(ROWS) - AXIS_ROW) / (WIDTH / 2)
        on_pipe = np.abs(across) <= 1
        normal = self.line.cladding.band_emissivity.value if emissivity is None else emissivity
        towards = directional_emissivity(
            normal, np.arcsin(np.clip(across, -1, 1)), self.line.cladding.is_metal
        )
        own = towards[:, None] * band.radiance(
            np.broadcast_to(surface_temperature, (ROWS, COLUMNS))
        )
        thrown_back = (1 - towards[:, None]) * band.radiance(reflected)
        scene = np.where(on_pipe[:, None], own + thrown_back, band.radiance(air))
        return band.temperature(transmission * scene + (1 - transmission) * band.radiance(air))

    def seen(self, lens: np.ndarray, clipped: np.ndarray | None = None) -> FrameImage:
        if self.noise:
            random = np.random.default_rng(1000 + self.seed)
            lens = lens + random.normal(0, self.noise, lens.shape)
        if clipped is None:
            clipped = np.zeros(lens.shape, dtype=bool)
        lens = np.where(clipped, np.nan, lens)
        return FrameImage("f1", lens, lens, clipped, FrameNoise(max(self.noise, 0.02), 1.0))

    def alone(self, lens: np.ndarray, **changes: Any) -> RegionResult:
        """What the image says by itself."""
        return conclude(self.observe(lens, **changes))

    def jointly(self, lens: np.ndarray, **changes: Any) -> RegionResult:
        """What image and specification say together."""
        return estimate_regions([self.observe(lens, **changes)], self.book, "f1")[0]

    def observe(self, lens: np.ndarray, **changes: Any) -> Observed:
        nothing = np.zeros(lens.shape, dtype=bool)
        image = self.seen(lens, changes.pop("clipped", None))
        arguments: dict[str, Any] = {
            "image": image,
            "left_out": nothing,
            "components": nothing,
            "known_lengths": (),
            "frame": self.frame_draws(),
            "line_draws": self.line_draws(),
            "conditions": self.conditions,
            "camera": self.camera,
            "book": self.book,
        } | changes
        return observe_region(self.region, self.line, **arguments)


def keys_of(remarks: tuple[Remark, ...]) -> set[str]:
    return {remark.key for remark in remarks}


@pytest.fixture
def bench() -> Bench:
    return Bench()


@pytest.fixture
def chilled() -> Bench:
    """Chilled water at 6 °C under 25 mm of foam, in the same hall, dry."""
    foam = ConductivityCurve((250.0, 330.0), (0.036, 0.036))
    return Bench(
        line=hot_line(
            layers=(Layer("foam", Quantity(0.025), foam, Quantity(1.0)),),
            inside_temperature=Quantity(279.15),
        )
    )


@pytest.fixture
def line_with() -> Callable[..., Line]:
    return hot_line


@pytest.fixture
def hall_with() -> Callable[..., Conditions]:
    return hall


@pytest.fixture
def paint() -> Callable[..., Cladding]:
    return painted


@pytest.fixture
def drawn_box() -> Callable[..., Region]:
    return box


@pytest.fixture
def drawn_pipe() -> Callable[..., Region]:
    return pipe_region


@pytest.fixture
def keys() -> Callable[[tuple[Remark, ...]], set[str]]:
    return keys_of


@pytest.fixture
def perimeter(bench: Bench) -> float:
    return math.pi * bench.exchange.diameter
