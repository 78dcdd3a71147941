"""Writes what the README shows of a run: ``python -m tests.readme_pictures``.

It assesses sample_data, draws the strip picture into the guide's images, and puts the head of the
console's table between its two marks in README.md.
"""

from pathlib import Path

import cladwatt
from cladwatt.report.console import console_summary
from cladwatt.report.html_report import strip_pictures

CLONE = Path(__file__).parent.parent
README = CLONE / "README.md"
PICTURE = CLONE / "src/cladwatt/guide/images/strip.svg"
SHOWN_REGION = "R10"
BEGIN, END = "<!-- table: begin -->\n", "<!-- table: end -->"
WIDTH = 100


def excerpt(assessment: cladwatt.Assessment) -> str:
    """Return totals and findings as the console prints them, without what follows."""
    lines = console_summary(assessment, WIDTH)
    table = next(i for i, line in enumerate(lines) if line.startswith("Likely damaged"))
    end = next((i for i in range(table, len(lines)) if not lines[i]), len(lines))
    return "\n".join(lines[:end])


def shown(readme: str) -> str:
    """Return the excerpt as it stands in the README."""
    return readme.partition(BEGIN)[2].partition(END)[0].strip("\n").strip("`").strip("\n")


def renewed(readme: str, text: str) -> str:
    """Return the README with another excerpt."""
    before, _, rest = readme.partition(BEGIN)
    _, mark, after = rest.partition(END)
    if not mark:
        raise SystemExit(f"README.md lacks the lines {BEGIN.strip()} and {END}")
    return f"{before}{BEGIN}```\n{text}\n```\n{END}{after}"


def main() -> None:
    assessment = cladwatt.assess(cladwatt.read_survey(CLONE / "sample_data"))
    PICTURE.parent.mkdir(parents=True, exist_ok=True)
    picture = strip_pictures(assessment)[SHOWN_REGION]
    PICTURE.write_text(picture, encoding="utf-8", newline="\n")
    text = renewed(README.read_text(encoding="utf-8"), excerpt(assessment))
    README.write_text(text, encoding="utf-8", newline="\n")


if __name__ == "__main__":
    main()
