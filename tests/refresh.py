"""Make again what is made: sample runs, page pictures, the lists in the README, the key reference, the schema."""

import json
import re
import shutil
import subprocess
import tempfile
from pathlib import Path
from typing import Any

from beforehand.hypothesis_tests.contract import STATISTICAL_TESTS
from beforehand.multiplicity.contract import PROCEDURES
from beforehand.record.manifest import RUN
from beforehand.snooping.contract import WARNING_RULES
from beforehand.spec.schema import json_schema, key_reference
from beforehand.study import report
from beforehand.terms import CRITERION_WORDS

ROOT = Path(__file__).parents[1]
STUDIES = sorted(path.parent.name for path in (ROOT / "specs").glob("*/spec.yaml"))


def sample_run(study: str) -> None:
    """Make one sample run: the run folder without what differs from run to run, and a picture of its first page."""
    target = ROOT / "sample_runs" / study
    with tempfile.TemporaryDirectory() as place:
        folder = Path(place) / study
        report(ROOT / "specs" / study / "spec.yaml", folder)
        (folder / RUN).unlink()
        picture = ["pdftoppm", "-r", "80", "-png", "-f", "1", "-l", "1", "-singlefile"]
        subprocess.run([*picture, str(folder / "report.pdf"), str(target)], check=True)
        shutil.rmtree(target, ignore_errors=True)
        shutil.copytree(folder, target)


def readme() -> str:
    """Give the README with its lists made again from the catalogues."""
    text = (ROOT / "README.md").read_text("utf-8")
    for name, table in tables().items():
        pattern = rf"(<!-- {name} -->\n).*?(<!-- /{name} -->)"
        text = re.sub(pattern, lambda found, table=table: f"{found[1]}{table}{found[2]}", text, flags=re.DOTALL)
    return text


def tables() -> dict[str, str]:
    """Give the tables of the three catalogues."""
    tests = [(f"`{name}`", entry.title, entry.estimates, entry.p_is) for name, entry in _entries(STATISTICAL_TESTS)]
    procedures = [
        (f"`{name}`", entry.title, CRITERION_WORDS[entry.controls], entry.valid_under)
        for name, entry in _entries(PROCEDURES)
    ]
    warnings = [(f"`{name}`", entry.title, entry.severity) for name, entry in _entries(WARNING_RULES)]
    return {
        "tests": _table(("word in the spec", "test", "estimate", "p"), tests),
        "procedures": _table(("word in the spec", "procedure", "keeps", "under"), procedures),
        "warnings": _table(("name", "speaks when", "severity, at most"), warnings),
    }


def _entries(catalogue: Any) -> list[tuple[str, Any]]:
    return [(name, catalogue[name]) for name in catalogue]


def _table(head: tuple[str, ...], rows: list[tuple[str, ...]]) -> str:
    lines = [head, tuple("---" for _ in head), *rows]
    return "\n" + "".join(f"| {' | '.join(line)} |\n" for line in lines) + "\n"


def schema() -> str:
    """Give the JSON Schema as it is committed."""
    return json.dumps(json_schema(), indent=1, ensure_ascii=False) + "\n"


def main() -> None:
    """Make everything again."""
    (ROOT / "README.md").write_text(readme(), "utf-8")
    (ROOT / "specs" / "keys.md").write_text(key_reference(), "utf-8")
    (ROOT / "specs" / "beforehand.schema.json").write_text(schema(), "utf-8")
    for study in STUDIES:
        print(f"sample_runs/{study}", flush=True)
        sample_run(study)


if __name__ == "__main__":
    main()
