"""The practice department: as it is said, again and again, in any folder."""

from __future__ import annotations

import stat
from dataclasses import replace
from typing import TYPE_CHECKING

import pytest
from program import SCENARIO

from featherlog.actions.database import status
from featherlog.actions.demo import build_demo
from featherlog.actions.solution import solve_files, stored_solution
from featherlog.actions.today import today
from featherlog.cli.show_demo import demo_text
from featherlog.errors import RefusedError

if TYPE_CHECKING:
    from pathlib import Path

    from featherlog.actions.demo import Demo


@pytest.fixture(scope="module")
def demo(tmp_path_factory: pytest.TempPathFactory) -> Demo:
    return build_demo(tmp_path_factory.mktemp("demo") / "my practice")


def test_it_stands_on_its_own_morning(demo: Demo) -> None:
    assert [(line.course, line.shift, line.due) for line in demo.due.lines] == [
        ("FH-2041", "yes", "today"),
        ("FH-2042", "yes", "today"),
        ("FH-2043", "yes", "today"),
    ]
    assert demo.due.lines[1].attention == "1 open departure(s)"
    assert (demo.day.fraction, demo.day.position, demo.day.heading.demo) == (6, "B", True)


def test_a_second_time_it_is_looked_at_and_not_built_again(demo: Demo) -> None:
    before = status(str(demo.database))
    assert build_demo(demo.folder) == demo
    assert status(str(demo.database)) == before


def test_what_to_type_next_can_be_typed(demo: Demo) -> None:
    quoted = f"'{demo.database}'"
    assert f"  featherlog today --database {quoted}" in demo_text(demo)


def test_its_files_are_its_owners(demo: Demo) -> None:
    assert [file.name for file in demo.files] == [
        "FH-2041-fraction-6.pdf",
        "FH-2043-fraction-6.pdf",
        "FH-2043-dossier.pdf",
        "FH-2042-review.pdf",
        "FH-2041-dose.svg",
    ]
    modes = {stat.S_IMODE(file.stat().st_mode) for file in demo.folder.iterdir()}
    assert modes == {0o600}


@pytest.mark.parametrize(
    ("key", "file"),
    [("FH-2041", "thigh.toml"), ("FH-2042", "breast.toml"), ("FH-2043", "spine.toml")],
)
def test_a_stored_design_is_what_its_file_is_solved_to(demo: Demo, key: str, file: str) -> None:
    stored = stored_solution(str(demo.database), key)
    solved = solve_files(SCENARIO / file, SCENARIO / "alder.toml")
    about = ("heading", "content_hash", "signatures", "returned_reason", "printed_at")
    assert replace(solved, **{name: getattr(stored, name) for name in about}) == stored


def test_the_craniospinal_patient_can_lie_prone(tmp_path: Path) -> None:
    view = today(str(build_demo(tmp_path, prone=True).database), "FH-2043")
    assert view.heading.patient_position == "HFP"


def test_a_stopped_run_leaves_nothing_half_built(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    with monkeypatch.context() as patch:
        patch.setattr("featherlog.actions.demo.approve", _stop)
        with pytest.raises(KeyboardInterrupt):
            build_demo(tmp_path)
    assert list(tmp_path.iterdir()) == []


def _stop(*_: object, **__: object) -> None:
    raise KeyboardInterrupt


def test_a_file_of_the_users_own_is_not_written_over(tmp_path: Path) -> None:
    (tmp_path / "thigh.toml").write_text("my own", encoding="utf-8")
    with pytest.raises(RefusedError, match=r"thigh\.toml is there already; name another"):
        build_demo(tmp_path)
    assert [file.read_text(encoding="utf-8") for file in tmp_path.iterdir()] == ["my own"]
