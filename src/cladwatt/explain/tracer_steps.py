"""Steps of a traced line: its tracer's stripe on the seen face, and its heat in the loss."""

import numpy as np

from cladwatt.explain.steps import Pad, source_of
from cladwatt.inverse.seen import Seen
from cladwatt.inverse.tracing import Stripe

__all__ = ["stripe_steps", "tracer_steps"]

DEALT = "median of the tracers that may lie there, by the bands of angle and what was declared"


def stripe_steps(pad: Pad, stripe: Stripe) -> None:
    """Write down what the stripe adds all round and where it is seen."""
    pad.given("tracer_rise", "r_tr", stripe.rise, "-", DEALT)
    pad.given("tracer_seen", "r_seen", stripe.seen_rise, "-", DEALT)
    pad.found("tracer_factor", "f_tr", stripe.factor, "-", "(1 + r_tr) / (1 + r_seen)",
              "r_tr r_seen")  # fmt: skip


def tracer_steps(pad: Pad, seen: Seen, stripe: Stripe, heat_loss: float) -> None:
    """Share the loss out between tracer and fluid.

    Parameters
    ----------
    pad : Pad
    seen : Seen
        With one draw.
    stripe : Stripe
    heat_loss : float
        At the station. [W/m]
    """
    if not stripe.is_split:
        return
    loss = np.array([heat_loss])
    pad.found("untraced_loss", "q'_off", stripe.untraced(loss), "W/m", "q' / (1 + r_tr)", "q' r_tr")
    heat = stripe.heat(loss)
    if stripe.power is not None:
        source = source_of(seen.line.tracing.power, "")
        pad.given("tracer_power", "q'_tr", heat, "W/m", source)
    else:
        pad.given("tracer_coupling", "m_tr", stripe.coupling, "-", DEALT)
        pad.found("tracer_heat", "q'_tr", heat, "W/m", "(m_tr + r_tr) q'_off",
                  "m_tr r_tr q'_off")  # fmt: skip
    pad.found("fluid_loss", "q'_fl", loss - heat, "W/m", "q' - q'_tr", "q' q'_tr")
