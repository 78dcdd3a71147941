"""The results folder: what is refused, and that earlier results outlive every failure."""

import dataclasses
import errno
import hashlib
import os
import signal
import subprocess
import sys
import textwrap
from pathlib import Path

import pandas as pd
import pytest

from cladwatt.errors import ResultsError
from cladwatt.results import folder_swap, store
from cladwatt.results.store import check_target, read_results, write_results


def tree(folder):
    return {
        path.relative_to(folder).as_posix(): path.read_bytes()
        for path in sorted(folder.rglob("*"))
        if path.is_file()
    }


def names_in(folder):
    return sorted(path.name for path in folder.iterdir())


@pytest.fixture(params=["one step", "two steps"])
def steps(request, monkeypatch):
    """Swap in one step where the system can, and in two as everywhere else."""
    if request.param == "two steps":
        monkeypatch.setattr(folder_swap, "_exchange", lambda first, second: False)  # noqa: ARG005
    return request.param


@pytest.fixture
def newer(odd):
    return dataclasses.replace(odd, inspector="second run", frames=odd.frames[:1])


def test_files_of_the_folder(odd, tmp_path):
    folder = write_results(
        odd, tmp_path / "deep" / "results", extra=lambda new: (new / "report.html").write_bytes(b"")
    )
    assert folder == (tmp_path / "deep" / "results").resolve()
    names = set(tree(folder))
    assert {
        "assessment.json", "regions.csv", "stretches.csv", "stations.csv", "COLUMNS.txt",
        "files.csv", "report.html", "draws/f01.npz", "stretches/f01.geojson",
    } <= names  # fmt: skip
    assert names_in(folder.parent) == ["results"]
    listed = pd.read_csv(folder / "files.csv", index_col="file", keep_default_na=False)
    assert set(listed.index) == names - {"files.csv"}
    for name, row in listed.iterrows():
        data = (folder / str(name)).read_bytes()
        assert row["bytes"] == len(data)
        assert row["sha256"] == hashlib.sha256(data).hexdigest()


def test_new_results_take_the_place_of_old_ones(odd, newer, tmp_path, steps):
    folder = tmp_path / "results"
    write_results(odd, folder, extra=lambda new: (new / "old.svg").write_text("old"))
    folder.chmod(0o750)
    write_results(newer, folder)
    assert read_results(folder).inspector == "second run"
    assert not (folder / "old.svg").exists()
    assert len(list((folder / "draws").iterdir())) == 1
    assert names_in(tmp_path) == ["results"], steps
    assert folder.stat().st_mode & 0o777 == 0o750


def test_the_exchange_is_one_step_here(tmp_path):
    if not sys.platform.startswith("linux"):
        assert not folder_swap._exchange(tmp_path, tmp_path)
        return
    one, two = tmp_path / "one", tmp_path / "two"
    one.mkdir()
    two.mkdir()
    (one / "a").touch()
    assert folder_swap._exchange(one, two)
    assert names_in(two) == ["a"]
    assert names_in(one) == []
    assert not folder_swap._exchange(one, tmp_path / "missing")


def test_an_empty_folder_and_litter_are_taken(odd, tmp_path):
    folder = tmp_path / "results"
    folder.mkdir()
    (folder / ".DS_Store").touch()
    write_results(odd, folder)
    (folder / "draws" / "Thumbs.db").touch()
    write_results(odd, folder)
    assert not (folder / "draws" / "Thumbs.db").exists()


@pytest.mark.parametrize("name", ["notes.txt", "draws/own.npz", ".hidden", "sub/x"])
def test_a_folder_holding_anything_else_is_refused(odd, newer, tmp_path, name):
    folder = write_results(odd, tmp_path / "results")
    (folder / name).parent.mkdir(exist_ok=True)
    (folder / name).write_text("mine")
    before = tree(tmp_path)
    with pytest.raises(ResultsError, match=rf"holds files that are no results .*\({name}\)"):
        write_results(newer, folder)
    assert tree(tmp_path) == before


def test_a_folder_that_is_not_ours_is_refused(odd, tmp_path):
    folder = tmp_path / "photos"
    folder.mkdir()
    for i in range(5):
        (folder / f"{i}.jpg").touch()
    with pytest.raises(ResultsError, match=r"0\.jpg, 1\.jpg, 2\.jpg and 2 more"):
        write_results(odd, folder)
    # a list alone does not make it ours
    (folder / "files.csv").write_text("file,bytes,sha256\n0.jpg,0,x\n")
    with pytest.raises(ResultsError, match="holds files that are no results"):
        write_results(odd, folder)


def test_changed_results_are_refused(odd, newer, tmp_path):
    folder = write_results(odd, tmp_path / "results")
    with (folder / "regions.csv").open("a") as file:
        file.write("a note by hand\n")
    with pytest.raises(ResultsError, match=r"changed since they were written \(regions\.csv\)"):
        write_results(newer, folder)


def test_a_link_in_the_results_is_refused_and_its_target_left_alone(odd, newer, tmp_path):
    folder = write_results(odd, tmp_path / "results")
    other = tmp_path / "other"
    other.mkdir()
    (other / "kept").touch()
    (folder / "link").symlink_to(other, target_is_directory=True)
    with pytest.raises(ResultsError, match=r"\(link\)"):
        write_results(newer, folder)
    assert (other / "kept").exists()


def test_a_results_folder_that_is_a_link_stays_one(odd, newer, tmp_path):
    (tmp_path / "disk").mkdir()
    link = tmp_path / "results"
    link.symlink_to(tmp_path / "disk", target_is_directory=True)
    write_results(odd, link)
    write_results(newer, link)
    assert link.is_symlink()
    assert read_results(link).inspector == "second run"


def test_places_that_cannot_be_results(tmp_path, monkeypatch):
    survey = tmp_path / "survey"
    survey.mkdir()
    for folder in (survey, tmp_path, survey / "x" / ".."):
        with pytest.raises(ResultsError, match="is the survey folder or holds it"):
            check_target(folder, survey)
    check_target(survey / "results", survey)
    assert names_in(survey) == []
    file = tmp_path / "file"
    file.touch()
    with pytest.raises(ResultsError, match="is a file; expected a folder"):
        check_target(file)
    with pytest.raises(ResultsError, match="file is a file, not a folder"):
        check_target(file / "results")
    with pytest.raises(ResultsError, match="root of a disk or mount"):
        check_target(Path(tmp_path.anchor))
    monkeypatch.setattr(os, "access", lambda path, mode: False)  # noqa: ARG005
    with pytest.raises(ResultsError, match="no permission to write in"):
        check_target(survey / "results")


class Boom(Exception):
    pass


@pytest.mark.parametrize("error", [Boom("drawing failed"), KeyboardInterrupt(), MemoryError()])
def test_what_extra_raises_is_passed_on_and_old_results_stay(odd, newer, tmp_path, error):
    folder = write_results(odd, tmp_path / "results")
    before = tree(tmp_path)

    def extra(new):
        (new / "report.html").write_text("half")
        raise error

    with pytest.raises(type(error)):
        write_results(newer, folder, extra=extra)
    assert tree(tmp_path) == before
    with pytest.raises(type(error)):
        write_results(newer, tmp_path / "fresh", extra=extra)
    assert names_in(tmp_path) == ["results"]


def full_after(monkeypatch, owner, name, calls, code=errno.ENOSPC):
    """Let a system call fail from the given call on."""
    real, count = getattr(owner, name), iter(range(10_000))

    def limited(*arguments, **options):
        if next(count) >= calls:
            raise OSError(code, os.strerror(code))
        return real(*arguments, **options)

    monkeypatch.setattr(owner, name, limited)


@pytest.mark.parametrize(
    ("owner", "name", "calls"),
    [(store, "write_frame_arrays", 0), (store, "write_tables", 0), (os, "fsync", 0),
     (os, "fsync", 7), (store, "write_assessment_file", 0), (store, "make_new", 0),
     (Path, "mkdir", 1)],
)  # fmt: skip
def test_a_full_disk_leaves_old_results_whole(
    odd, newer, tmp_path, monkeypatch, owner, name, calls
):
    folder = write_results(odd, tmp_path / "results")
    before = tree(tmp_path)
    with monkeypatch.context() as patch:
        full_after(patch, owner, name, calls)
        with pytest.raises(ResultsError, match=r"the disk is full\. Nothing was changed"):
            write_results(newer, folder)
    assert tree(tmp_path) == before
    assert names_in(tmp_path) == ["results"]


@pytest.mark.skipif(not Path("/dev/full").exists(), reason="needs the device that is always full")
def test_a_full_device_is_told_plainly(odd, tmp_path):
    def extra(new):
        (new / "report.html").write_text("")
        Path("/dev/full").write_text("report")

    with pytest.raises(ResultsError, match="the disk is full"):
        write_results(odd, tmp_path / "results", extra=extra)
    assert names_in(tmp_path) == []


@pytest.mark.parametrize(
    ("code", "words"),
    [(errno.EROFS, "read-only"), (errno.EACCES, "no permission"), (errno.EIO, "disk reports"),
     (errno.ENAMETOOLONG, "name is too long"), (errno.EMFILE, os.strerror(errno.EMFILE))],
)  # fmt: skip
def test_the_system_s_refusal_in_plain_words(odd, tmp_path, monkeypatch, code, words):
    full_after(monkeypatch, store, "make_new", 0, code)
    with pytest.raises(ResultsError, match=words):
        write_results(odd, tmp_path / "results")


@pytest.mark.parametrize("failing", [0, 1])
def test_a_swap_that_fails_puts_the_old_folder_back(odd, newer, tmp_path, monkeypatch, failing):
    folder = write_results(odd, tmp_path / "results")
    before = tree(tmp_path)
    monkeypatch.setattr(folder_swap, "_exchange", lambda first, second: False)  # noqa: ARG005
    real, count = Path.rename, iter(range(100))

    def rename(path, target):
        if next(count) == failing:
            raise PermissionError(errno.EACCES, "in use")
        return real(path, target)

    monkeypatch.setattr(Path, "rename", rename)
    with pytest.raises(ResultsError, match="no permission"):
        write_results(newer, folder)
    assert tree(tmp_path) == before


def test_a_file_put_there_during_the_run_stops_the_swap(odd, newer, tmp_path):
    folder = write_results(odd, tmp_path / "results")
    with pytest.raises(ResultsError, match=r"\(notes\.txt\)"):
        write_results(newer, folder, extra=lambda new: (folder / "notes.txt").write_text("mine"))  # noqa: ARG005
    assert (folder / "notes.txt").read_text() == "mine"
    assert read_results(folder).inspector == odd.inspector


def test_a_second_writer_is_refused(odd, newer, tmp_path):
    folder = tmp_path / "results"

    def extra(new):
        assert new.is_dir()
        with pytest.raises(ResultsError, match="another run is writing there"):
            write_results(newer, folder)
        write_results(newer, tmp_path / "other")

    write_results(odd, folder, extra=extra)
    assert read_results(folder).inspector == odd.inspector
    write_results(newer, folder)
    assert sorted(names_in(tmp_path)) == ["other", "results"]


KILLED = """
    import os, signal, sys
    from pathlib import Path
    from cladwatt.results import folder_swap
    from cladwatt.results.store import read_results, write_results

    source, folder, moment = Path(sys.argv[1]), Path(sys.argv[2]), sys.argv[3]

    def die(*_, **__):
        os.kill(os.getpid(), signal.SIGKILL)

    assessment = read_results(source)
    if moment == "writing":
        write_results(assessment, folder, extra=die)
    if moment == "before the swap":
        folder_swap._exchange = die
    if moment == "between two renamings":
        real = Path.rename
        def rename(path, target):
            if path.name.endswith(".new"):
                die()
            return real(path, target)
        Path.rename = rename
        folder_swap._exchange = lambda first, second: False
    if moment == "after the swap":
        import shutil
        shutil.rmtree = die
    write_results(assessment, folder)
"""


@pytest.mark.skipif(sys.platform == "win32", reason="there is no such signal on Windows")
@pytest.mark.parametrize(
    ("moment", "whose"),
    [("writing", "old"), ("before the swap", "old"), ("between two renamings", "old"),
     ("after the swap", "new")],
)  # fmt: skip
def test_a_killed_run_leaves_whole_results(odd, newer, tmp_path, moment, whose):
    source = write_results(newer, tmp_path / "source")
    place = tmp_path / "place"
    folder = write_results(odd, place / "results")
    old = tree(folder)
    done = subprocess.run(
        [sys.executable, "-c", textwrap.dedent(KILLED), str(source), str(folder), moment],
        check=False,
    )
    assert done.returncode == -signal.SIGKILL
    assert len(names_in(place)) > 1
    assert read_results(folder).inspector == ("second run" if whose == "new" else odd.inspector)
    assert tree(folder) == (tree(source) if whose == "new" else old)
    # the next run finds its way and clears what was left
    write_results(newer, folder)
    assert tree(folder) == tree(source)
    assert names_in(place) == ["results"]


def test_long_and_strange_folder_names(odd, tmp_path):
    for name in ("r" * 250, "Ergebnisse März 蒸気 #1 [x]", ".results"):
        write_results(odd, tmp_path / name)
        write_results(odd, tmp_path / name)
    assert len(names_in(tmp_path)) == 3
