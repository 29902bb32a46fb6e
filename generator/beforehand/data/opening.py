"""The only door for input files: a spec names a path, and gets the bytes of a regular file inside its folder."""

import difflib
import gzip
import io
import os
import stat
import zlib
from pathlib import Path

from beforehand.errors import CallFault, DataFault

MAX_BYTES = 500_000_000  # of a file, and of what it unpacks to: about what a machine with 8 GB holds as a table
PIECE = 1 << 20


def open_input(path: str, *, folder: Path, data_root: Path | None = None, limit: int = MAX_BYTES) -> bytes:
    """Read one input file whole and once; everything that is hashed or parsed later is these bytes.

    ``path`` is as the spec writes it, relative to ``folder``; a file that is not there is looked for at the same
    path under ``data_root``. Links are followed, and their end must lie in one of the two.
    """
    _check_written(path)
    roots = [folder.resolve(strict=True)]
    if data_root is not None:
        roots.append(_existing_root(data_root))
    found = _locate(path, roots)
    try:
        # not blocking, or a named pipe would hang here; not following, for links were resolved before
        opened = os.open(found, os.O_RDONLY | os.O_CLOEXEC | os.O_NONBLOCK | os.O_NOFOLLOW)
    except OSError as refused:
        raise DataFault(path, f"the file can't be opened: {refused.strerror}.") from None
    try:
        return _whole(opened, path, limit)
    finally:
        os.close(opened)


def _whole(opened: int, path: str, limit: int) -> bytes:
    facts = os.fstat(opened)
    if not stat.S_ISREG(facts.st_mode):
        raise DataFault(path, "this is not a file but a folder, a pipe or a device. Name a CSV or TSV file.")
    with open(opened, "rb", closefd=False) as file:
        raw = file.read(limit + 1) if facts.st_size <= limit else b""
    if facts.st_size > limit or len(raw) > limit:
        raise DataFault(path, f"the file is larger than {limit:,} bytes, the most that is read. Split it.")
    return raw


def unpacked(raw: bytes, *, source: str, limit: int = MAX_BYTES) -> bytes:
    """Unpack gzip piece by piece, so that a small file which unpacks to an enormous one is stopped in time."""
    if not raw.startswith(b"\x1f\x8b"):
        raise DataFault(source, "the file is not packed by gzip, although its name ends in .gz. Name it as what it is.")
    pieces: list[bytes] = []
    size = 0
    try:
        with gzip.GzipFile(fileobj=io.BytesIO(raw)) as packed:
            while piece := packed.read(PIECE):
                size += len(piece)
                if size > limit:
                    raise DataFault(
                        source, f"it unpacks to more than {limit:,} bytes, the most that is read. Split it."
                    )
                pieces.append(piece)
    except (gzip.BadGzipFile, EOFError, zlib.error):
        raise DataFault(source, "the gzip file is damaged or cut short. Get a whole copy.") from None
    return b"".join(pieces)


def _check_written(path: str) -> None:
    """Refuse by its text alone a path that isn't plainly relative: it would read differently elsewhere."""
    parts = path.split("/")
    odd = any(sign in path for sign in "\0\\:") or path.startswith("~")
    if odd or any(part in ("", ".", "..") for part in parts):
        raise DataFault(
            path.replace("\0", "�"),
            "a file is named by its path below the spec's folder, with single / between the parts and no '..', "
            "drive, '~' or address. Write, for example, data/stores.csv.",
        )


def _existing_root(data_root: Path) -> Path:
    if not data_root.is_dir():
        raise CallFault("--data-root", f"there is no folder {data_root}.")
    return data_root.resolve(strict=True)


def _locate(path: str, roots: list[Path]) -> Path:
    """Find the file, links resolved, in the first root that has it."""
    for root in roots:
        try:
            found = (root / path).resolve(strict=True)
        except (OSError, RuntimeError):  # RuntimeError: a loop of links
            continue
        if not any(found.is_relative_to(allowed) for allowed in roots):
            raise DataFault(
                path,
                "a link leads to a file outside the spec's folder, which is not opened. "
                "Copy the file there, or allow the folder where it lies: --data-root FOLDER.",
            )
        return found
    raise DataFault(path, f"there is no such file below the spec's folder.{_nearest(path, roots[0])}")


def _nearest(path: str, root: Path) -> str:
    """Suggest the file in the same folder whose name is most like the one written."""
    written = Path(path)
    beside = (root / written).parent
    if not beside.is_dir() or not beside.resolve().is_relative_to(root):
        return f" There is no folder {written.parent} either."
    near = difflib.get_close_matches(written.name, sorted(entry.name for entry in beside.iterdir()), n=1)
    return f" The nearest name is '{(written.parent / near[0]).as_posix()}'." if near else ""
