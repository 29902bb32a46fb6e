"""Which model describes a place of the file: for messages, the JSON Schema and the list of what is not built."""

import types
import typing
from collections.abc import Iterator
from typing import Annotated, Any, Literal, Union, get_args, get_origin

from pydantic import BaseModel
from pydantic.fields import FieldInfo

Path = tuple[str | int, ...]


def key_of(name: str, field: FieldInfo) -> str:
    """Give the key as it is written in YAML."""
    return field.alias or name


def fields_of(model: type[BaseModel]) -> dict[str, FieldInfo]:
    """Give the fields of a model by the keys that are written in YAML."""
    return {key_of(name, field): field for name, field in model.model_fields.items()}


def further(model: type[BaseModel]) -> Any:
    """Give the type of the keys that a model takes without naming them; None where it takes no such keys."""
    return (
        typing.get_type_hints(model).get("__pydantic_extra__") if model.model_config.get("extra") == "allow" else None
    )


def models_below(model: type[BaseModel]) -> Iterator[type[BaseModel]]:
    """Find the models that the values of a model's keys may be."""
    for annotation in (*(field.annotation for field in model.model_fields.values()), further(model)):
        yield from models_in(annotation)


def models_in(annotation: Any) -> Iterator[type[BaseModel]]:
    """Find the models that a value of this type may be."""
    if isinstance(annotation, type) and issubclass(annotation, BaseModel):
        yield annotation
    elif get_origin(annotation) is not Literal:
        for part in get_args(annotation):
            yield from models_in(part)


def models_at(model: type[BaseModel], path: Path) -> tuple[type[BaseModel], ...]:
    """Find the models that may describe the block at a path; names of alternatives in the path are passed over."""
    annotations: list[Any] = [model]
    for part in path:
        below = [found for annotation in annotations for found in _below(annotation, part)]
        annotations = below or annotations
    return tuple(dict.fromkeys(found for annotation in annotations for found in _here(annotation)))


def _alternatives(annotation: Any) -> tuple[Any, ...]:
    origin = get_origin(annotation)
    if origin is Annotated:
        return _alternatives(get_args(annotation)[0])
    if origin in (Union, types.UnionType):
        return tuple(found for part in get_args(annotation) for found in _alternatives(part))
    return (annotation,)


def _here(annotation: Any) -> Iterator[type[BaseModel]]:
    for found in _alternatives(annotation):
        if isinstance(found, type) and issubclass(found, BaseModel):
            yield found


def _below(annotation: Any, part: str | int) -> Iterator[Any]:
    for found in _alternatives(annotation):
        origin = get_origin(found)
        if origin is tuple and isinstance(part, int):
            yield get_args(found)[0]
        elif origin is dict and isinstance(part, str):
            yield get_args(found)[1]
        elif isinstance(found, type) and issubclass(found, BaseModel) and isinstance(part, str):
            fields = fields_of(found)
            if part in fields:
                yield fields[part].annotation
            elif further(found):
                yield get_args(further(found))[1]
