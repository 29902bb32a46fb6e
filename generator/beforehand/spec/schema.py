"""The JSON Schema for editors and the key reference for readers, both made from the models.

``python -m beforehand.spec.schema FOLDER`` writes both files.
"""

import json
import sys
from collections.abc import Iterator
from pathlib import Path
from typing import Any

from pydantic import BaseModel

from beforehand.hypothesis_tests.contract import STATISTICAL_TESTS
from beforehand.multiplicity.contract import PROCEDURES
from beforehand.spec.availability import is_later
from beforehand.spec.model import PARTICULAR, Document, PerHypothesis
from beforehand.spec.model.walk import fields_of, models_below

SCHEMA_FILE = "beforehand.schema.json"
REFERENCE_FILE = "keys.md"

_TYPES = {"string": "text", "number": "number", "integer": "whole number", "boolean": "true or false"}
_LATER = "Not available yet."


def json_schema() -> dict[str, Any]:
    """Give the JSON Schema (2020-12) of a spec."""
    schema: dict[str, Any] = _tidy(Document.model_json_schema(by_alias=True))
    for name, model in _models().items():
        block = schema if name == "Document" else schema["$defs"].get(name)
        fields = fields_of(model)
        for key, part in (block or {}).get("properties", {}).items():
            later = f" {_LATER}" if is_later(model, key) else ""
            part["description"] = f"{fields[key].description}{later}"
            names = {"test": STATISTICAL_TESTS.names, "procedure": PROCEDURES.names}.get(key)
            if names:
                part["enum"] = list(names)
    return {"$schema": "https://json-schema.org/draft/2020-12/schema", "title": "beforehand spec", **schema}


def _tidy(part: Any) -> Any:
    """Take out what says nothing to an editor: titles made from keys, and the null that no spec may hold."""
    if isinstance(part, list):
        return [_tidy(item) for item in part if item != {"type": "null"}]
    if not isinstance(part, dict):
        return part
    tidy = {
        key: _tidy(item)
        for key, item in part.items()
        if not (key == "title" and isinstance(item, str)) and not (key == "default" and item in (None, {}, []))
    }
    alternatives = tidy.get("anyOf", [])
    if len(alternatives) == 1:
        del tidy["anyOf"]
        tidy = {**alternatives[0], **tidy}
    return tidy


def _models() -> dict[str, type[BaseModel]]:
    """Give every model of the language, in the order in which a reader of a spec meets them."""
    found: dict[str, type[BaseModel]] = {}

    def meet(model: type[BaseModel]) -> None:
        if model.__name__ not in found:
            found[model.__name__] = model
            for below in models_below(model):
                meet(below)

    meet(Document)
    return found


def key_reference() -> str:
    """Give the key reference as Markdown: a table for each block, in the order of a spec."""
    schema = json_schema()
    lines = [
        "# Keys of a spec",
        "",
        "Made from the models by `python -m beforehand.spec.schema`. Keys in bold must be there. "
        "A *particular* is printed and may change after a plan is sealed; everything else belongs to the plan.",
        "",
    ]
    lines += _section("every hypothesis", PerHypothesis, schema["$defs"]["WrittenHypothesis"])
    for name, model in _models().items():
        block = schema if name == "Document" else schema["$defs"][name]
        lines += _section(_title(name), model, block)
    return "\n".join(lines).rstrip() + "\n"


def _title(name: str) -> str:
    if name == "Document":
        return "the whole file"
    words = "".join(f" {letter.lower()}" if letter.isupper() else letter for letter in name)
    return words.strip()


def _section(title: str, model: type[BaseModel], block: dict[str, Any]) -> Iterator[str]:
    yield f"## {title}"
    yield ""
    yield (model.__doc__ or "").strip()
    shared = issubclass(model, PerHypothesis) and model is not PerHypothesis
    if shared:
        yield f"Also takes the keys of [every hypothesis]({_anchor('every hypothesis')})."
    yield ""
    yield "| key | takes | when left out | meaning |"
    yield "| --- | --- | --- | --- |"
    for key, field in fields_of(model).items():
        if shared and key in PerHypothesis.model_fields:
            continue
        part = block["properties"][key]
        required = key in block.get("required", ())
        default = "" if required or "default" not in part else f"`{json.dumps(part['default'], ensure_ascii=False)}`"
        meaning = part["description"] + (" *Particular.*" if PARTICULAR in field.metadata else "")
        yield f"| {f'**{key}**' if required else key} | {_takes(part)} | {default} | {_cell(meaning)} |"
    extra = block.get("additionalProperties")
    if isinstance(extra, dict):
        yield f"| *any other* | {_takes(extra)} | | |"
    yield ""


def _anchor(title: str) -> str:
    return f"#{title.replace(' ', '-')}"


def _cell(text: str) -> str:
    return text.replace("|", "\\|").replace("\n", " ")


def _takes(part: dict[str, Any]) -> str:  # noqa: PLR0911 -- one sentence for each kind of value
    """Say what a key takes, in a few words."""
    for alternatives in ("anyOf", "oneOf"):
        if alternatives in part:
            return " or ".join(dict.fromkeys(_takes(item) for item in part[alternatives]))
    if "$ref" in part:
        title = _title(part["$ref"].rsplit("/", 1)[1])
        return f"[{title}]({_anchor(title)})"
    if "enum" in part or "const" in part:
        return ", ".join(f"`{word}`" for word in part.get("enum", [part.get("const")]))
    if part.get("type") == "array":
        return f"list of {_takes(part.get('items') or part['prefixItems'][0])}"
    if part.get("type") == "object":
        return f"names, each with {_takes(part['additionalProperties'])}"
    if str(part.get("pattern", "")).startswith(r"^\d+/"):
        return "fraction"
    return _TYPES.get(str(part.get("type")), "anything")


def write(folder: Path) -> None:
    """Write the schema and the key reference into a folder."""
    text = json.dumps(json_schema(), indent=1, ensure_ascii=False)
    (folder / SCHEMA_FILE).write_text(f"{text}\n", encoding="utf-8", newline="\n")
    (folder / REFERENCE_FILE).write_text(key_reference(), encoding="utf-8", newline="\n")


if __name__ == "__main__":
    write(Path(sys.argv[1]))
