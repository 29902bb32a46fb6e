"""The two parts of a spec in the form of RFC 8785: the plan, which is sealed, and the particulars."""

import hashlib
from typing import Any, cast

import rfc8785
from pydantic import BaseModel

from beforehand.spec.model import PARTICULAR, Document, Exact, Family
from beforehand.spec.planned import PlannedFamily, PlannedSupportive

_EMPTY: tuple[Any, ...] = ({}, (), [], None)
_FORMS = ("comparisons", "hypotheses", "hypotheses_from")


def canonical_parts(
    document: Document, families: tuple[PlannedFamily, ...], supportive: tuple[PlannedSupportive, ...] = ()
) -> tuple[bytes, bytes]:
    """Give the plan, with the expansion and every default, and the particulars."""
    plan, particulars = _split(document)
    plan["families"] = [_family(*pair) for pair in zip(document.families, families, strict=True)]
    for written in plan.get("supportive", []):
        written["analyses"] = [plain(one.hypothesis) for one in supportive if one.asked == written["id"]]
    return rfc8785.dumps(plan), rfc8785.dumps(particulars)


def checksum(part: bytes) -> str:
    """Give the SHA-256 of a part, as ``sha256sum`` prints it."""
    return hashlib.sha256(part).hexdigest()


def _family(written: Family, planned: PlannedFamily) -> dict[str, Any]:
    """Write a family with its members in place of the form they come from."""
    shared = {key: plain(value) for key, value, _ in _keys(written) if key not in _FORMS}
    members = {"from_data": plain(planned.from_data)} if planned.from_data else {"members": plain(planned.members)}
    options = {"procedure_options": planned.procedure_options} if planned.procedure_options else {}
    return {**shared, **options, "planned": planned.planned, **members}


def _split(model: BaseModel) -> tuple[dict[str, Any], dict[str, Any]]:
    """Divide the keys of a block; an entry of a list keeps its id in both parts."""
    plan: dict[str, Any] = {}
    particulars: dict[str, Any] = {}
    for key, value, particular in _keys(model):
        if particular:
            particulars[key] = plain(value)
        elif isinstance(value, BaseModel):
            plan[key], inner = _split(value)
            particulars.update({key: inner} if inner else {})
        elif isinstance(value, tuple) and all(isinstance(item, BaseModel) for item in value):
            parts = [_split(cast(BaseModel, item)) for item in value]
            plan[key] = [part[0] for part in parts]
            pairs = zip(value, parts, strict=True)
            own = [{"id": getattr(item, "id", None), **part[1]} for item, part in pairs if part[1]]
            particulars.update({key: own} if own else {})
        else:
            plan[key] = plain(value)
    return plan, particulars


def _keys(model: BaseModel) -> list[tuple[str, Any, bool]]:
    """Give the keys that say something, as they are written, and whether each is a particular."""
    return [
        (field.alias or name, getattr(model, name), PARTICULAR in field.metadata)
        for name, field in type(model).model_fields.items()
        if getattr(model, name) not in _EMPTY
    ]


def plain(value: Any) -> Any:
    """Turn a value of the models into what JSON knows."""
    if isinstance(value, BaseModel):
        extra = {key: plain(item) for key, item in (value.__pydantic_extra__ or {}).items()}
        written = {key: plain(item) for key, item, _ in _keys(value)}
        return {**{key: item for key, item in written.items() if item != {}}, **extra}
    if isinstance(value, Exact):
        return value.canonical()
    if isinstance(value, tuple):
        return [plain(item) for item in value]
    if isinstance(value, dict):
        return {key: plain(item) for key, item in value.items()}
    return value
