"""One region as the engine sees it where every quantity has its nominal (median) value."""

from dataclasses import dataclass, replace

import numpy as np

from cladwatt.errors import InputError
from cladwatt.frame_assessment import (
    fitting_regions,
    lens_image,
    observe_with_references,
    pipe_distance,
)
from cladwatt.inverse.draws import DrawBook
from cladwatt.inverse.frame_draws import FrameDraws, draw_frame
from cladwatt.inverse.observe import Observed
from cladwatt.inverse.references import read_references, with_frame_references
from cladwatt.inverse.seen import FrameImage
from cladwatt.measure.outline import region_mask
from cladwatt.quantities import Quantity
from cladwatt.results.assessment import Settings
from cladwatt.survey.frame import Frame, read_frame
from cladwatt.survey.model import FrameEntry
from cladwatt.survey.region import Region
from cladwatt.survey.survey import Survey
from cladwatt.types import FloatArray

__all__ = ["NominalBook", "NominalRegion", "nominal_region"]


class NominalBook(DrawBook):
    """Gives the middle of every distribution, whoever asks."""

    def normal(self, owner: str, quantity: str) -> FloatArray:  # noqa: ARG002  the same for all
        """Return the median of the standard normal distribution, (count,)."""
        return np.zeros(self.count)

    def shares(
        self,
        owner: str,  # noqa: ARG002
        quantity: str,  # noqa: ARG002
        mean: FloatArray,
        directions: float,  # noqa: ARG002
    ) -> FloatArray:
        """Return the mean of the shares."""
        return mean


@dataclass(frozen=True)
class NominalRegion:
    """A region at nominal values.

    Attributes
    ----------
    image : FrameImage
    path : Quantity
        Camera to pipe: declared, by the image, or the default. [m]
    observed : Observed or None
        With one draw; None where no air temperature is known.
    by_reference : dict of str to str
        Quantities that references in the frame narrowed, with how.
    """

    entry: FrameEntry
    image: FrameImage
    path: Quantity
    observed: Observed | None
    by_reference: dict[str, str]


def nominal_region(survey: Survey, region: Region, settings: Settings) -> NominalRegion:
    """Read a pipe region off its frame with nominal values.

    Parameters
    ----------
    survey : Survey
    region : Region
        One of its pipe regions.
    settings : Settings
        Of the draws in which references of the frame are weighed against what was declared.

    Returns
    -------
    NominalRegion

    Raises
    ------
    InputError
        If frame or region cannot be used.
    """
    entry = survey.frame(region.frame_id)
    frame = read_frame(entry, root=survey.root)
    regions, left_out = fitting_regions(survey, entry, frame)
    if region not in regions:
        concerned = (one.message for one in left_out if one.id in (region.id, entry.id))
        raise InputError("\n".join(concerned))
    return _Scene(survey, entry, frame, regions, settings).nominal(region)


class _Scene:
    """A frame with its usable regions."""

    def __init__(
        self,
        survey: Survey,
        entry: FrameEntry,
        frame: Frame,
        regions: list[Region],
        settings: Settings,
    ) -> None:
        self.survey, self.entry, self.regions = survey, entry, regions
        self.image = lens_image(survey, entry, frame)
        self.readings = read_references(self.image.lens_temperature, regions, survey.defaults)
        pipes = [one for one in regions if one.role == "pipe"]
        self.distance = pipe_distance(survey, frame, pipes)
        self.default_distance = survey.defaults["distance"]
        self.masks = {one.id: region_mask(one, frame.temperature.shape) for one in regions}
        self.book = DrawBook(settings.seed, settings.draws)

    def nominal(self, region: Region) -> NominalRegion:
        """Return the region with one draw of everything, the median."""
        by_reference: dict[str, str] = {}
        frame = self._frame(NominalBook(0, 1))
        if frame is None:
            return NominalRegion(self.entry, self.image, self.path(), None, by_reference)
        if self.readings:
            frame, region = self._narrowed(frame, region, by_reference)
        observed, _ = observe_with_references(
            self.survey, self.entry, region, self.regions, self.masks, self.image, frame, (),
            NominalBook(0, 1),
        )  # fmt: skip
        return NominalRegion(self.entry, self.image, self.path(), observed, by_reference)

    def path(self) -> Quantity:
        """Return the distance that the air path is taken for. [m]"""
        declared, seen = self.entry.conditions.distance, self.distance
        if declared is not None or seen is None:
            return declared or self.default_distance
        source = "by the field of view and known diameters"
        return Quantity(seen, 0.15 * seen, lower=0.3, upper=149.0, source=source)

    def _frame(self, book: DrawBook) -> FrameDraws | None:
        survey, entry = self.survey, self.entry
        return draw_frame(
            book, entry.id, entry.conditions, survey.camera, survey.site, self.distance,
            survey.defaults, survey.convection_model,
        )  # fmt: skip

    def _narrowed(
        self, nominal: FrameDraws, region: Region, by_reference: dict[str, str]
    ) -> tuple[FrameDraws, Region]:
        """Put the medians of the draws where references in the frame have moved them."""
        before = self._frame(self.book)
        assert before is not None
        after, _ = with_frame_references(before, self.readings, self.book)
        if after.calibration is not before.calibration:
            by_reference["calibration"] = "background of known temperature in the frame"
            nominal = replace(nominal, calibration=_median(after.calibration))
        if after.reflected_temperature is not before.reflected_temperature:
            by_reference["reflected_temperature"] = "declared, weighed with foil in the frame"
            nominal = replace(nominal, reflected_temperature=_median(after.reflected_temperature))
        if any(r.region.tag == region.tag and r.region.role in ("tape", "contact")
               for r in self.readings):  # fmt: skip
            observed, remarks = observe_with_references(
                self.survey, self.entry, region, self.regions, self.masks, self.image, after,
                self.readings, self.book,
            )  # fmt: skip
            if any(remark.key == "remark.tape_used" for remark in remarks):
                by_reference["band_emissivity"] = "declared, weighed with tape or contact reading"
                emissivity = float(np.median(observed.seen.line_draws.band_emissivity))
                region = replace(region, band_emissivity=Quantity(emissivity))
        return nominal, region


def _median(draws: FloatArray) -> FloatArray:
    return np.array([np.median(draws)])
