"""The door for input files: what a spec may not name, and what may lie behind a name."""

import gzip
import os
import socket
import tracemalloc
from pathlib import Path

import pytest

from beforehand.data.opening import MAX_BYTES, open_input, unpacked
from beforehand.errors import CallFault, DataFault


@pytest.fixture
def folder(tmp_path: Path) -> Path:
    inside = tmp_path / "study"
    (inside / "data").mkdir(parents=True)
    (inside / "data" / "stores.csv").write_bytes(b"a,b\n1,2\n")
    (tmp_path / "outside").mkdir()
    (tmp_path / "outside" / "secret.csv").write_bytes(b"secret\n1\n")
    return inside


def test_a_plain_relative_path_is_opened(folder: Path) -> None:
    assert open_input("data/stores.csv", folder=folder) == b"a,b\n1,2\n"


@pytest.mark.parametrize(
    "path",
    [
        "../outside/secret.csv",
        "data/../../outside/secret.csv",
        "data/./stores.csv",
        "./data/stores.csv",
        "data//stores.csv",
        "data/",
        "",
        ".",
        "~/secret.csv",
        "~root/secret.csv",
        "file:data/stores.csv",
        "file:///etc/passwd",
        "https://example.org/stores.csv",
        "C:/stores.csv",
        "data\\stores.csv",
        "data/stores.csv\0.txt",
        "/etc/passwd",
    ],
)
def test_a_path_that_is_not_plainly_relative_is_refused_by_its_text(folder: Path, path: str) -> None:
    with pytest.raises(DataFault, match="a file is named by its path below the spec's folder"):
        open_input(path, folder=folder)


def test_an_absolute_path_is_refused_even_inside_the_folder(folder: Path) -> None:
    with pytest.raises(DataFault, match="a file is named by its path"):
        open_input(str(folder / "data" / "stores.csv"), folder=folder)


def test_a_link_that_stays_inside_is_followed(folder: Path) -> None:
    (folder / "latest.csv").symlink_to("data/stores.csv")
    assert open_input("latest.csv", folder=folder) == b"a,b\n1,2\n"


@pytest.mark.parametrize("target", ["../outside/secret.csv", "/etc/hostname"])
def test_a_link_that_leads_outside_is_refused(folder: Path, target: str) -> None:
    (folder / "link.csv").symlink_to(target)
    if not (folder / target).exists():
        pytest.skip(f"this machine has no {target}")
    with pytest.raises(DataFault, match="a link leads to a file outside the spec's folder"):
        open_input("link.csv", folder=folder)


def test_a_linked_folder_that_leads_outside_is_refused(folder: Path) -> None:
    (folder / "linked").symlink_to("../outside")
    with pytest.raises(DataFault) as refused:
        open_input("linked/secret.csv", folder=folder)
    assert str(refused.value) == (
        "linked/secret.csv: a link leads to a file outside the spec's folder, which is not opened. "
        "Copy the file there, or allow the folder where it lies: --data-root FOLDER."
    )


def test_a_missing_file_behind_a_linked_folder_lists_no_names_from_there(folder: Path) -> None:
    (folder / "linked").symlink_to("../outside")
    with pytest.raises(DataFault) as refused:
        open_input("linked/secre.csv", folder=folder)
    assert "secret" not in str(refused.value)


def test_a_folder_with_a_similar_name_is_outside(folder: Path) -> None:
    beside = folder.with_name("study-2")
    beside.mkdir()
    (beside / "x.csv").write_bytes(b"x\n1\n")
    (folder / "x.csv").symlink_to(beside / "x.csv")
    with pytest.raises(DataFault, match="a link leads to a file outside"):
        open_input("x.csv", folder=folder)


def test_links_in_a_circle_are_a_missing_file(folder: Path) -> None:
    (folder / "one.csv").symlink_to("two.csv")
    (folder / "two.csv").symlink_to("one.csv")
    with pytest.raises(DataFault, match="there is no such file"):
        open_input("one.csv", folder=folder)


def test_a_named_pipe_is_refused_and_does_not_hang(folder: Path) -> None:
    os.mkfifo(folder / "pipe.csv")
    with pytest.raises(DataFault, match="this is not a file but a folder, a pipe or a device"):
        open_input("pipe.csv", folder=folder)


def test_a_folder_is_refused(folder: Path) -> None:
    with pytest.raises(DataFault, match="this is not a file but a folder"):
        open_input("data", folder=folder)


def test_a_socket_is_refused(folder: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(folder)  # the path of a socket may have about 100 characters only
    with socket.socket(socket.AF_UNIX) as listening:
        listening.bind("socket.csv")
        with pytest.raises(DataFault, match="the file can't be opened"):
            open_input("socket.csv", folder=folder)


def test_a_missing_file_is_answered_with_the_nearest_name(folder: Path) -> None:
    with pytest.raises(DataFault) as refused:
        open_input("data/store.csv", folder=folder)
    assert str(refused.value) == (
        "data/store.csv: there is no such file below the spec's folder. The nearest name is 'data/stores.csv'."
    )


def test_a_missing_folder_is_named(folder: Path) -> None:
    with pytest.raises(DataFault) as refused:
        open_input("dat/stores.csv", folder=folder)
    assert str(refused.value) == (
        "dat/stores.csv: there is no such file below the spec's folder. There is no folder dat either."
    )


def test_a_file_over_the_cap_is_refused(folder: Path) -> None:
    with pytest.raises(DataFault, match="the file is larger than 7 bytes"):
        open_input("data/stores.csv", folder=folder, limit=7)
    assert len(open_input("data/stores.csv", folder=folder, limit=8)) == 8


def test_a_data_root_is_a_second_place_for_the_same_path(folder: Path, tmp_path: Path) -> None:
    assert open_input("secret.csv", folder=folder, data_root=tmp_path / "outside") == b"secret\n1\n"


def test_the_folder_of_the_spec_comes_before_the_data_root(folder: Path, tmp_path: Path) -> None:
    (folder / "secret.csv").write_bytes(b"mine\n1\n")
    assert open_input("secret.csv", folder=folder, data_root=tmp_path / "outside") == b"mine\n1\n"


def test_a_link_may_lead_into_the_data_root(folder: Path, tmp_path: Path) -> None:
    (folder / "link.csv").symlink_to("../outside/secret.csv")
    assert open_input("link.csv", folder=folder, data_root=tmp_path / "outside") == b"secret\n1\n"


def test_a_data_root_that_does_not_exist_is_a_fault_of_the_call(folder: Path) -> None:
    with pytest.raises(CallFault, match="there is no folder"):
        open_input("data/stores.csv", folder=folder, data_root=folder / "nowhere")


def test_a_packed_file_is_unpacked_whole() -> None:
    text = b"a,b\n1,2\n" * 300_000  # more than one piece
    assert unpacked(gzip.compress(text), source="x.csv.gz") == text


def test_a_small_file_that_unpacks_to_an_enormous_one_is_stopped_in_time() -> None:
    bomb = gzip.compress(bytes(100_000_000))
    assert len(bomb) < 100_000
    tracemalloc.start()
    with pytest.raises(DataFault, match="it unpacks to more than 4,000,000 bytes"):
        unpacked(bomb, source="bomb.csv.gz", limit=4_000_000)
    _, peak = tracemalloc.get_traced_memory()
    tracemalloc.stop()
    assert peak < 10_000_000  # the cap, and a few pieces of 1 MiB


def test_the_cap_that_applies_to_users_is_a_hard_number() -> None:
    assert MAX_BYTES == 500_000_000


@pytest.mark.parametrize(
    "damage", [lambda packed: packed[:-9], lambda packed: packed + b"PK", lambda packed: packed[:-8] + bytes(8)]
)
def test_a_damaged_packed_file_is_refused(damage) -> None:  # type: ignore[no-untyped-def]
    with pytest.raises(DataFault, match="the gzip file is damaged or cut short"):
        unpacked(damage(gzip.compress(b"a,b\n1,2\n")), source="x.csv.gz")
