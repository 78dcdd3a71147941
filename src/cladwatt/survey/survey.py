"""A survey as read: everything that stands in its files but the frames' pixels."""

from collections.abc import Mapping
from dataclasses import dataclass, field
from datetime import date
from pathlib import Path

from cladwatt.errors import Fault
from cladwatt.materials.load import MaterialTables, shipped_tables
from cladwatt.physics.convection_laws import ConvectionModel
from cladwatt.quantities import Quantity
from cladwatt.survey.model import Camera, Conditions, FrameEntry, Line, Site
from cladwatt.survey.region import Region

__all__ = ["Survey"]


@dataclass(frozen=True)
class Survey:
    """One survey folder.

    Parameters
    ----------
    root : Path
        The folder, absolute.
    name, inspector : str
    date : date or None
    site : Site
    camera : Camera
    lines : mapping of tag to Line
    frames : tuple of FrameEntry
    regions : tuple of Region
        In the order of the frames, then of their files.
    faults : tuple of Fault
        What made a line, frame or region be left out, and questions.
    digests : mapping of str to str
        SHA-256 of survey file, lists, tables and regions files by path from the root.
    tables : MaterialTables
        What ships, with the survey's own ``tables/`` added.
    convection_model : str
        Name of the correlations of convection, see `cladwatt.physics.convection`.
    conditions : Conditions
        Those for the whole survey, which frames may override.
    """

    root: Path
    name: str
    date: date | None
    inspector: str
    site: Site
    camera: Camera
    lines: Mapping[str, Line]
    frames: tuple[FrameEntry, ...]
    regions: tuple[Region, ...]
    faults: tuple[Fault, ...] = ()
    digests: Mapping[str, str] = field(default_factory=dict)
    tables: MaterialTables | None = field(default=None, repr=False, compare=False)
    convection_model: ConvectionModel = "churchill"
    conditions: Conditions = field(default_factory=Conditions)

    @property
    def defaults(self) -> Mapping[str, Quantity]:
        """What is taken where nothing is declared, by name. [SI]"""
        return (self.tables or shipped_tables()).defaults

    def regions_of(self, frame_id: str) -> tuple[Region, ...]:
        """Return the regions drawn on one frame."""
        return tuple(region for region in self.regions if region.frame_id == frame_id)

    def frame(self, frame_id: str) -> FrameEntry:
        """Return a frame by its id.

        Raises
        ------
        KeyError
            If there is none.
        """
        for entry in self.frames:
            if entry.id == frame_id:
                return entry
        raise KeyError(frame_id)
