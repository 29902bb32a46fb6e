"""Small studies: the data section and the families of a spec as text, and the files beside it."""

import textwrap
from pathlib import Path

import pytest

from beforehand.data.dataset import Dataset, read_data, with_members
from beforehand.spec.load import load_spec
from beforehand.spec.planned import Spec

FAMILY = """
- id: main
  question: Which differs?
  procedure: benjamini_hochberg
  hypotheses:
"""


class Study:
    """A spec in a folder of its own, and what is read from it."""

    def __init__(self, folder: Path) -> None:
        self.folder = folder

    def write(self, path: str, content: str | bytes) -> None:
        file = self.folder / path
        file.parent.mkdir(parents=True, exist_ok=True)
        file.write_bytes(content if isinstance(content, bytes) else textwrap.dedent(content).lstrip().encode())

    def spec(self, data: str, hypotheses: str = "", *, families: str = "") -> Spec:
        """Load a spec from its data section and either the hypotheses of one family or all families."""
        families = families or FAMILY + textwrap.indent(textwrap.dedent(hypotheses).strip(), "    ")
        self.write(
            "spec.yaml",
            "beforehand: 1\n"
            "study: {title: Door closures of cold stores, identifier: CS-2031-07, intent: exploratory}\n"
            "promise: {criterion: false_discovery_rate, level: 0.10, level_is: two_sided}\n"
            f"data:\n{textwrap.dedent(data)}\nfamilies:\n{textwrap.dedent(families)}\n",
        )
        return load_spec(self.folder / "spec.yaml")

    def read(self, data: str, hypotheses: str = "", *, families: str = "") -> tuple[Spec, Dataset]:
        """Read the data of such a spec, and give its members."""
        spec = self.spec(data, hypotheses, families=families)
        dataset = read_data(spec)
        return with_members(spec, dataset), dataset


@pytest.fixture
def study(tmp_path: Path) -> Study:
    return Study(tmp_path)
