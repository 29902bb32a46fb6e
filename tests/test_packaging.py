"""What is installed is what the tree holds: packages, templates, fonts, the command, the public names."""

import os
import subprocess
import sys
import tomllib
import zipfile
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[1]
PYPROJECT = tomllib.loads((ROOT / "pyproject.toml").read_text("utf-8"))


def tracked(*folders: str) -> list[Path]:
    listing = subprocess.run(["git", "ls-files", *folders], cwd=ROOT, capture_output=True, text=True, check=True)
    return [Path(line) for line in listing.stdout.splitlines()]


def test_every_package_is_listed() -> None:
    found = {
        ".".join(path.parent.relative_to(ROOT / "generator").parts)
        for path in (ROOT / "generator" / "beforehand").rglob("__init__.py")
    }
    assert PYPROJECT["tool"]["setuptools"]["packages"] == sorted(found | {"beforehand.templates"})


def test_the_lock_and_the_versions_agree() -> None:
    from beforehand import __version__

    assert PYPROJECT["project"]["version"] == __version__
    lock = (ROOT / "generator" / "requirements.lock").read_text("utf-8")
    assert "://" not in lock
    for requirement in PYPROJECT["project"]["dependencies"]:
        name = requirement.split(">")[0].lower()
        assert f"\n{name}==" in f"\n{lock}", name


def test_the_wheel_holds_every_file(tmp_path: Path) -> None:
    build = [sys.executable, "-m", "build", "--wheel", "--no-isolation", "--outdir", str(tmp_path), str(ROOT)]
    done = subprocess.run(build, capture_output=True, text=True, check=False)
    if done.returncode and "Missing dependencies" in done.stdout + done.stderr:
        pytest.fail("the build backend is not installed in the environment of the tests")
    assert done.returncode == 0, done.stderr[-2000:]
    (wheel,) = tmp_path.glob("*.whl")
    names = {name for name in zipfile.ZipFile(wheel).namelist() if ".dist-info/" not in name}
    expected = {str(path.relative_to("generator")) for path in tracked("generator/beforehand")}
    expected |= {f"beforehand/{path}" for path in tracked("templates")}
    assert names == expected


def test_help_brings_nothing_heavy() -> None:
    # numpy, yaml, pydantic, rich: each would cost more than the whole help text
    code = (
        "import sys; from beforehand.cli import exit_code; exit_code(['--help']); "
        "heavy = {'numpy', 'scipy', 'pandas', 'yaml', 'pydantic', 'rich', 'matplotlib', 'weasyprint', 'jinja2'}; "
        "sys.exit(f'imported: {heavy & set(sys.modules)}' if heavy & set(sys.modules) else 0)"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=False)
    assert done.returncode == 0, done.stderr


def test_the_package_is_typed_and_its_names_are_there() -> None:
    import beforehand

    assert (ROOT / "generator" / "beforehand" / "py.typed").is_file()
    for name in beforehand.__all__:
        assert getattr(beforehand, name) is not None
    with pytest.raises(AttributeError, match="module 'beforehand' has no attribute 'nothing'"):
        beforehand.nothing  # noqa: B018


def test_help_takes_at_most_twice_the_time_of_importing_click() -> None:
    def seconds(*arguments: str) -> float:
        times = []
        for _ in range(7):
            before = os.times()
            subprocess.run([sys.executable, *arguments], capture_output=True, check=True)
            after = os.times()
            times.append(after.children_user + after.children_system - before.children_user - before.children_system)
        return min(times)  # processor time; the quickest of several, for the machine is shared

    assert seconds("-m", "beforehand", "--help") <= 2 * seconds("-c", "import click")
