"""From the file to the Spec: read, check key by key, check across keys, expand; all faults at once."""

from dataclasses import dataclass, replace
from pathlib import Path
from typing import Any

from pydantic import ValidationError

from beforehand.errors import Fault, SpecFault
from beforehand.spec import availability, places, wording
from beforehand.spec.canonical import canonical_parts
from beforehand.spec.checks import findings
from beforehand.spec.expand import expand
from beforehand.spec.model import Document
from beforehand.spec.planned import PlannedFamily, Spec
from beforehand.spec.supportive import supportive_analyses

__all__ = ["PlannedFamily", "Spec", "load_spec", "read_spec"]

# What stands in for a section that is unsound, so that the rest can be checked; what rests on it isn't.
_PROMISE = {"criterion": "familywise_error_rate", "level": 0.05}
_STUDY = {"title": "?", "identifier": "?"}


@dataclass(frozen=True)
class _Sound:
    """The part of a spec whose every key is sound; ``families`` are the numbers of its families in the file."""

    document: Document
    families: tuple[int, ...]
    all_families: bool
    promise: bool

    def in_file(self, path: places.Path) -> places.Path:
        if path[:1] == ("families",) and len(path) > 1:
            return ("families", self.families[int(path[1])], *path[2:])
        return path


def load_spec(path: Path) -> Spec:
    """Read a spec from its file; SpecFault holds everything that is wrong with it."""
    path = Path(path)
    try:
        with path.open("rb") as file:
            source = file.read(places.LARGEST_FILE + 1)  # one byte too many is enough to refuse it
    except OSError as error:
        raise SpecFault(path.name, f"the file can't be read: {error.strerror}") from None
    return read_spec(source, path)


def read_spec(source: bytes, path: Path) -> Spec:
    """Read a spec from its bytes; ``path`` is where they lie, and its folder is where data files are looked for."""
    try:
        reading = places.read(source)
    except places.NotYaml as fault:
        raise SpecFault(path.name, [_whole(one) for one in fault.faults]) from None
    if not isinstance(reading.value, dict) or not reading.value:
        raise SpecFault(path.name, "this is no spec: it has no keys. `beforehand draft` writes one to begin with.")
    document, faults = _checked(reading)
    if document is None:
        raise SpecFault(path.name, [_whole(fault) for fault in faults])
    families = expand(document)
    supportive = supportive_analyses(document)
    plan, particulars = canonical_parts(document, families, supportive)
    return Spec(path, source, document, families, plan, particulars, reading.places, supportive)


def _whole(fault: Fault) -> Fault:
    """End the message as a sentence ends."""
    return fault if fault.text.endswith(".") else replace(fault, text=f"{fault.text}.")


def _checked(reading: places.Reading) -> tuple[Document | None, list[Fault]]:
    """Check every key, and across keys where they are sound; the document only when nothing is wrong."""
    faults = list(reading.faults)
    try:
        document = Document.model_validate(reading.value)
        sound: _Sound | None = _Sound(document, tuple(range(len(document.families))), all_families=True, promise=True)
    except ValidationError as error:
        worded = wording.faults_of(error.errors(include_url=False), reading)
        faults += [fault for _, fault in worded]
        document, sound = None, _sound(reading.value, [*reading.trapped, *(path for path, _ in worded)])
    if sound:
        faults += _across(sound, reading.places)
    return (None if faults else document), faults


def _across(sound: _Sound, where: places.Places) -> list[Fault]:
    across = findings(sound.document, families=sound.all_families, promise=sound.promise)
    found = [*availability.refusals(sound.document), *across]
    return [where.fault(sound.in_file(one.path), one.text, at_key=one.at_key) for one in found]


def _sound(value: dict[str, Any], unsound: list[places.Path]) -> _Sound | None:
    """Leave out the sections and families in which something is wrong; None where too little is left."""
    sections = {path[0] for path in unsound if path}
    if () in unsound or "data" in sections or not isinstance(value.get("families"), tuple):
        return None
    wrong = {path[1] for path in unsound if path[0] == "families" and len(path) > 1}
    kept = tuple(number for number in range(len(value["families"])) if number not in wrong)
    rest = {key: part for key, part in value.items() if key == "families" or key not in sections}
    if "study" in sections:
        study = value.get("study")
        intent = study.get("intent") if isinstance(study, dict) else None
        rest["study"] = {**_STUDY, "intent": intent}
    rest = {"beforehand": 1, "promise": _PROMISE, **rest}
    rest["families"] = tuple(value["families"][number] for number in kept)
    try:
        document = Document.model_validate(rest)
    except ValidationError:
        return None
    return _Sound(document, kept, all_families="families" not in sections, promise="promise" not in sections)
