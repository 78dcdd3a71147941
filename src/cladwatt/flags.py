"""Quality flags of stations and pixels: bit, short name, sentence, in one registry."""

from enum import IntFlag

__all__ = ["FLAG_SENTENCES", "StationFlag", "flag_names"]


class StationFlag(IntFlag):
    """What is wrong or doubtful at a station; 0 is nothing."""

    MASKED = 1
    """Some pixels were dead, clipped or left out."""
    GAP = 2
    """Nothing usable here; the station carries no number."""
    NARROW = 4
    """The used width holds fewer than three measuring spots."""
    CLIPPED = 8
    """Pixels at the end of the recording range."""
    INFEASIBLE = 16
    """Many draws gave a temperature the fluid and air cannot produce."""
    OUTSIDE_VALIDITY = 32
    """A correlation was used outside its published range."""
    BELOW_DEW_POINT = 64
    """Vapour condenses here."""
    FROST = 128
    """Below 0 °C and below the frost point."""


FLAG_SENTENCES: dict[StationFlag, str] = {
    StationFlag.MASKED: "some pixels were dead, clipped or left out",
    StationFlag.GAP: "nothing usable here",
    StationFlag.NARROW: "the used width holds fewer than three measuring spots",
    StationFlag.CLIPPED: "pixels at the end of the recording range",
    StationFlag.INFEASIBLE: "the recorded value implies more than fluid and air can produce",
    StationFlag.OUTSIDE_VALIDITY: "a correlation was used outside its published range",
    StationFlag.BELOW_DEW_POINT: "below the dew point of the declared air",
    StationFlag.FROST: "below 0 °C and below the frost point",
}


def flag_names(bits: int) -> str:
    """Return the names of the set bits, lower case, joined by ``|``; empty for none."""
    return "|".join(str(flag.name).lower() for flag in StationFlag if bits & flag)
