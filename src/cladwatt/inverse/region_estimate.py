"""The regions of a frame from what each shows to what is concluded of all of them together."""

from collections.abc import Sequence

from cladwatt.inverse.conclude import conclude
from cladwatt.inverse.draws import DrawBook
from cladwatt.inverse.joint import joint_update
from cladwatt.inverse.observe import Observed
from cladwatt.inverse.result import RegionResult

__all__ = ["estimate_regions"]


def estimate_regions(
    observed: Sequence[Observed], book: DrawBook, frame_id: str
) -> tuple[RegionResult, ...]:
    """Estimate the pipe regions of one frame jointly.

    Parameters
    ----------
    observed : sequence of Observed
        All pipe regions of the frame, read with the same draws.
    book : DrawBook
    frame_id : str

    Returns
    -------
    tuple of RegionResult
        In the same order.
    """
    evidence = [found for one in observed if (found := one.evidence()) is not None]
    updates = joint_update(evidence, book, frame_id)
    return tuple(conclude(one, updates) for one in observed)
