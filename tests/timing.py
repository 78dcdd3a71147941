"""``python -m tests.timing``: where the time of one frame goes, on one core.

Profiles the assessment of the sample; ``--write`` puts the table on the guide's page. The profiler
itself slows short functions down, so the shares are rough.
"""

import argparse
import cProfile
import pstats
import time
from pathlib import Path

from cladwatt.assess import assess
from cladwatt.survey.survey_file import read_survey

ROOT = Path(__file__).parent.parent
PAGE = ROOT / "src/cladwatt/guide/time.md"
STEPS = (
    # function, file, what it is, what it buys
    ("look_at_frame", "frame_assessment", "first look at every frame, 400 draws",
     "what frames tell each other: some 5 points of the intervals' width"),
    ("read_frame", "survey/frame", "reading files, in both passes", "the data"),
    ("lens_image", "frame_assessment", "camera settings undone, noise estimated, in both passes",
     "the image as it reached the lens"),
    ("observe_region", "inverse/observe", "strip, draws of face and balance, in both passes",
     "loss of the image alone with its interval"),
    ("sound_draws", "inverse/sound", "of it, sound lagging solved draw by draw",
     "specified and sound loss"),
    ("moved", "inverse/conclude", "draws moved to agree", "the joint estimate"),
    ("local_damage", "inverse/local_damage", "damage against sound, by marginal likelihood",
     "the probabilities: fewer false alarms and fewer misses at once"),
    ("recovered_of", "inverse/recovered", "blur and spread undone", "the profile with its bands"),
    ("region_kinds", "inverse/kinds", "kinds weighed", "likely kinds"),
    ("best_measurement", "inverse/advice", "readings tried", "the advice with its promise"),
    ("station_table", "inverse/station_table", "quantiles at every station", "the strip's bands"),
)  # fmt: skip


def table() -> str:
    """Return the page."""
    survey = read_survey(ROOT / "sample_data")
    assess(survey)
    started = time.process_time()
    regions = len(assess(survey).regions)
    plain = time.process_time() - started
    profile = cProfile.Profile()
    profile.enable()
    assess(survey)
    profile.disable()
    stats = pstats.Stats(profile).stats  # type: ignore[attr-defined]
    whole = sum(own for _, _, own, _, _ in stats.values())
    rows = []
    for function, file, what, buys in STEPS:
        spent = sum(
            total
            for (path, _, name), (_, _, _, total, _) in stats.items()
            if name == function and path.endswith(f"cladwatt/{file}.py")
        )
        share = spent / whole
        rows.append(f"| {what} | {1e3 * plain * share / regions:.0f} | {share:.0%} | {buys} |")
    return (
        "# Where the time goes\n\n"
        "Made by `python -m tests.timing --write` from a clone: the sample survey, one core, 1000 "
        f"draws. {regions} regions on {len(survey.frames)} frames took {plain:.1f} s of processor "
        f"time, {1e3 * plain / regions:.0f} ms a region. Steps contain each other: shares do not "
        "add up to one.\n\n"
        "| step | ms a region | share | what it buys |\n| --- | ---: | ---: | --- |\n"
        + "\n".join(rows)
        + "\n"
    )


def main() -> None:
    """Print the page, or write it."""
    parser = argparse.ArgumentParser(prog="python -m tests.timing", description=__doc__)
    parser.add_argument("--write", action="store_true", help="write the guide's page")
    text = table()
    if parser.parse_args().write:
        PAGE.write_text(text, encoding="utf-8")
    print(text)


if __name__ == "__main__":
    main()
