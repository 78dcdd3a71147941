"""What each run came to, kept by run and seed, so that a page can be put together from several."""

import hashlib
import json
import sys
from collections.abc import Iterable, Sequence
from dataclasses import asdict, replace
from pathlib import Path
from typing import Any

from tests.calibration.cases import Case
from tests.calibration.surveys import SurveyCases
from tests.calibration.totals import TotalCase
from tests.calibration.variants import VARIANTS

__all__ = ["code_state", "joined_with_oracle", "keep_piece", "kept_pieces"]

_BENCH = Path(__file__).parent
_PACKAGE = _BENCH.parent.parent / "src/cladwatt"
_NO_PART = ("guide", "report", "faces", "explain")
_COUNTED = "counted"


def code_state() -> str:
    """Return a digest of all code and data that the kept numbers depend on."""
    digest = hashlib.sha256()
    files = [path for path in _PACKAGE.rglob("*")
             if path.suffix in (".py", ".csv", ".toml")
             and path.relative_to(_PACKAGE).parts[0] not in _NO_PART]  # fmt: skip
    files += [_BENCH / f"{name}.py" for name in
              ("baselines", "cases", "counting", "kinds", "oracle", "surveys", "totals",
               "variants")]  # fmt: skip
    for path in sorted(files):
        digest.update(path.name.encode() + b"\0" + path.read_bytes() + b"\0")
    return digest.hexdigest()


def keep_piece(keep: Path, variant: str, result: SurveyCases, code: str) -> None:
    """Keep what a seed of a run came to, in place of what it came to before."""
    path = keep / _COUNTED / variant / f"{result.seed}.json"
    path.parent.mkdir(parents=True, exist_ok=True)
    whole = {"code": code, **asdict(result)}
    # as a whole or not at all
    beside = path.with_suffix(".part")
    beside.write_text(json.dumps(whole, default=_plain), encoding="utf-8")
    beside.replace(path)


def _plain(value: Any) -> Any:
    """Return a number of numpy as one of Python."""
    return value.item()


def kept_pieces(keep: Path, code: str) -> dict[str, list[SurveyCases]]:
    """Return what was kept by run, in the order of seeds.

    Parameters
    ----------
    keep : Path
    code : str
        Digest of the present code. What other code came to is left out, and said to be.
    """
    found: dict[str, list[SurveyCases]] = {}
    for name in VARIANTS:
        paths = sorted((keep / _COUNTED / name).glob("*.json"), key=lambda path: int(path.stem))
        read = [json.loads(path.read_text(encoding="utf-8")) for path in paths]
        own = [_read(one) for one in read if one["code"] == code]
        if len(own) < len(read):
            print(f"{name}: {len(read) - len(own)} kept surveys were counted by other code and "
                  "are left out; run them again", file=sys.stderr)  # fmt: skip
        if own:
            found[name] = own
    return found


def _read(whole: dict[str, Any]) -> SurveyCases:
    return SurveyCases(
        seed=whole["seed"],
        cases=tuple(Case(**one) for one in whole["cases"]),
        left_out=tuple(whole["left_out"]),
        seconds_drawing=whole["seconds_drawing"],
        seconds_assessing=whole["seconds_assessing"],
        totals=tuple(TotalCase(**one) for one in whole["totals"]),
    )


def joined_with_oracle(cases: Iterable[Case], oracle: Sequence[SurveyCases]) -> list[Case]:
    """Return cases with what the oracle's run found of the same regions."""
    best = {(one.seed, one.region_id): one for run in oracle for one in run.cases}
    return [
        case if (found := best.get((case.seed, case.region_id))) is None else replace(
            case, oracle=found.loss, oracle_low=found.loss_low, oracle_high=found.loss_high,
            oracle_probability=found.probability,
        )
        for case in cases
    ]  # fmt: skip
