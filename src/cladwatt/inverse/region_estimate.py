"""The regions of a frame from what each shows to what is concluded of all of them together."""

from collections.abc import Mapping, Sequence

from cladwatt.inverse.conclude import conclude
from cladwatt.inverse.draws import DrawBook
from cladwatt.inverse.joint import SharedEvidence, joint_update
from cladwatt.inverse.observe import Observed
from cladwatt.inverse.result import RegionResult
from cladwatt.materials.rows import DamageKind

__all__ = ["estimate_regions"]


def estimate_regions(
    observed: Sequence[Observed],
    book: DrawBook,
    frame_id: str,
    shared: SharedEvidence | None = None,
    kinds: Mapping[str, DamageKind] | None = None,
) -> tuple[RegionResult, ...]:
    """Estimate the pipe regions of one frame jointly.

    Parameters
    ----------
    observed : sequence of Observed
        All pipe regions of the frame, read with the same draws.
    book : DrawBook
    frame_id : str
    shared : SharedEvidence, optional
        What other frames say of what this one shares with them.
    kinds : mapping of key to DamageKind, optional
        What damage may look like; what ships where left out.

    Returns
    -------
    tuple of RegionResult
        In the same order.
    """
    evidence = [found for one in observed if (found := one.evidence()) is not None]
    updates = joint_update(evidence, book, frame_id, shared)
    return tuple(conclude(one, updates, kinds) for one in observed)
