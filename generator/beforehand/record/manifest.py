"""Checksum lists in the format of the coreutils: ``sha256sum -c`` reads them."""

from beforehand.record.canonical import sha256

MANIFEST = "manifest-sha256.txt"
INPUTS = "inputs-sha256.txt"
RUN = "run.json"
"""What may differ between reruns; no manifest lists it."""


def checksum_lines(checksums: dict[str, str]) -> bytes:
    """Write one line per file, sorted by name: 64 digits, two spaces, the name."""
    return "".join(f"{checksums[name]}  {name}\n" for name in sorted(checksums)).encode()


def manifest(files: dict[str, bytes]) -> bytes:
    """Write the manifest of a run folder: every file but itself and ``run.json``."""
    return checksum_lines({name: sha256(body) for name, body in files.items() if name not in (MANIFEST, RUN)})


def read_checksums(text: bytes) -> dict[str, str]:
    """Read a checksum list back: name to checksum."""
    pairs = (line.split("  ", 1) for line in text.decode().splitlines() if line)
    return {pair[1]: pair[0] for pair in pairs if len(pair) == 2}


def altered(files: dict[str, bytes]) -> list[str]:
    """Name, in order, every listed file that is missing or differs, and every file that no list names."""
    listed = read_checksums(files.get(MANIFEST, b""))
    wrong = [name for name, checksum in listed.items() if name not in files or sha256(files[name]) != checksum]
    unlisted = [name for name in files if name not in listed and name not in (MANIFEST, RUN)]
    return sorted(wrong + unlisted)
