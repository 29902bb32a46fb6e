"""Bad data files, each with the whole message that its reader gets.

faults/NAME.csv has its message in faults/NAME.csv.txt; all are read under faults/spec.yaml. The messages come from the
code, and each was read against its file before it was kept.
"""

from pathlib import Path

import pytest

from beforehand.data.dataset import read_data
from beforehand.errors import DataFault
from beforehand.spec.load import load_spec

FAULTS = Path(__file__).parent / "faults"
MESSAGES = sorted(FAULTS.glob("*.txt"))


def study(folder: Path, data: Path) -> Path:
    """Write the spec of the table beside a copy of the data file."""
    (folder / data.name).write_bytes(data.read_bytes())
    spec = folder / "spec.yaml"
    spec.write_text((FAULTS / "spec.yaml").read_text("utf-8").replace("FILE", data.name), "utf-8")
    return spec


@pytest.mark.parametrize("message", MESSAGES, ids=[message.stem for message in MESSAGES])
def test_the_message_is_whole(tmp_path: Path, message: Path) -> None:
    with pytest.raises(DataFault) as refused:
        read_data(load_spec(study(tmp_path, message.with_suffix(""))))
    assert str(refused.value) + "\n" == message.read_text("utf-8")


def test_the_spec_of_the_table_reads_a_sound_file_with_values_at_both_ends_of_the_range(tmp_path: Path) -> None:
    dataset = read_data(load_spec(study(tmp_path, FAULTS / "sound.csv")))
    assert dataset.tables["stores"].lines.tolist() == [2, 3, 4, 5, 6]


def test_every_file_of_the_table_has_its_message() -> None:
    files = {path.name for path in FAULTS.iterdir()} - {"spec.yaml", "sound.csv"}
    assert {name for name in files if not name.endswith(".txt")} == {message.stem for message in MESSAGES}
    assert len(MESSAGES) >= 22
