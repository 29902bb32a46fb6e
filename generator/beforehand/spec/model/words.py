"""The kinds of value that keys of a spec hold: ids, names, prose, exact numbers, paths, dates, expressions."""

import datetime
import difflib
import re
from fractions import Fraction
from typing import Annotated, Any

from pydantic import (
    AfterValidator,
    BaseModel,
    BeforeValidator,
    ConfigDict,
    Field,
    GetCoreSchemaHandler,
    GetJsonSchemaHandler,
)
from pydantic.json_schema import JsonSchemaValue
from pydantic_core import CoreSchema, PydanticCustomError, core_schema

from beforehand.hypothesis_tests.contract import STATISTICAL_TESTS
from beforehand.multiplicity.contract import PROCEDURES
from beforehand.spec import availability
from beforehand.spec.expressions import ExpressionFault, parse

LONGEST_NAME = 200  # characters of a column, a level, a label: what a table cell can still show
LONGEST_PROSE = 4000


class Keys(BaseModel):
    """What every block of a spec shares: no unknown key, no changed type, no change once it is read."""

    model_config = ConfigDict(
        extra="forbid", strict=True, frozen=True, allow_inf_nan=False, use_attribute_docstrings=True
    )


class Part:
    """Marks a key whose value belongs to the particulars: printed, never a departure from the sealed plan."""


PARTICULAR = Part()


def refused(text: str) -> PydanticCustomError:
    """Make the fault that says what was expected; ``wording`` puts the place and what was found around it."""
    return PydanticCustomError("refused", "{text}", {"text": text})


def sentence(text: str) -> PydanticCustomError:
    """Make a fault that is whole as it stands."""
    return PydanticCustomError("sentence", "{text}", {"text": text})


def told(text: str) -> PydanticCustomError:
    """Make a fault that needs only the name of its place before it."""
    return PydanticCustomError("told", "{text}", {"text": text})


class Exact(float):
    """A level, weight or share: a float that keeps the fraction it was written as."""

    fraction: Fraction

    @classmethod
    def of(cls, written: Any) -> "Exact":
        """Take a number as its shortest decimal, and text such as '1/3' as that fraction."""
        if isinstance(written, Exact):
            return written
        fraction = _fraction(written)
        number = cls(float(fraction))
        number.fraction = fraction
        return number

    def canonical(self) -> float | str:
        """Give the number where its decimal is exact, else the fraction in lowest terms as text."""
        same = Fraction(repr(float(self))) == self.fraction
        return float(self) if same else f"{self.fraction.numerator}/{self.fraction.denominator}"

    @classmethod
    def __get_pydantic_core_schema__(cls, source: Any, handler: GetCoreSchemaHandler) -> CoreSchema:
        return core_schema.no_info_plain_validator_function(
            cls.of, serialization=core_schema.plain_serializer_function_ser_schema(cls.canonical)
        )

    @classmethod
    def __get_pydantic_json_schema__(cls, schema: CoreSchema, handler: GetJsonSchemaHandler) -> JsonSchemaValue:
        return {"anyOf": [{"type": "number"}, {"type": "string", "pattern": r"^\d+/[1-9]\d*$"}]}


def _fraction(written: Any) -> Fraction:
    if isinstance(written, (int, float)) and not isinstance(written, bool):
        return Fraction(repr(written))
    if isinstance(written, str) and re.fullmatch(r"[0-9]{1,9} ?/ ?[1-9][0-9]{0,8}", written):
        return Fraction(written.replace(" ", ""))
    raise refused("must be a number, or a fraction such as 1/3")


def _between(lowest: float, highest: float, words: str) -> BeforeValidator:
    def check(written: Any) -> Exact:
        try:
            number = Exact.of(written)
        except PydanticCustomError:
            raise refused(f"must be {words}") from None
        if not lowest < number < highest:
            raise refused(f"must be {words}")
        return number

    return BeforeValidator(check)


def _share(written: Any) -> Any:
    if isinstance(written, str) and "epsilon" in written:
        if re.fullmatch(r"epsilon|1 - epsilon", written):
            return written
        raise refused("must be a number between 0 and 1, a fraction, 'epsilon' or '1 - epsilon'")
    number = Exact.of(written)
    if not 0 <= number <= 1:
        raise refused("must be a number between 0 and 1, a fraction, 'epsilon' or '1 - epsilon'")
    return number


def _prose(text: str) -> str:
    return " ".join(text.split())


def _date(text: str) -> str:
    try:
        if datetime.date.fromisoformat(text).isoformat() == text:
            return text
    except ValueError:
        pass
    raise refused("must be a date of the calendar, written as 2031-03-02")


def _path(text: str) -> str:
    parts = text.split("/")
    if any(sign in text for sign in '\\:\n"') or text.startswith("~") or any(p in ("", ".", "..") for p in parts):
        raise refused("must be a path below the folder of the spec, written with '/', without '..'")
    return text


def _folder(text: str) -> str:
    _path(text.removesuffix("/"))
    return text


def _expression(text: str) -> str:
    one_line = text.strip().replace("\n", " ")
    try:
        parse(one_line)
    except ExpressionFault as fault:
        raise told(f"can't be read: {fault.text}") from None
    return one_line


def _claim(text: str) -> str:
    text = _prose(text)
    if not text:
        raise refused("must be a sentence")
    return text


def _name(text: str) -> str:
    if not text.strip() or "\n" in text or len(text) > LONGEST_NAME:
        raise refused(f"must be text on one line with at most {LONGEST_NAME} characters")
    return text


def _code(text: str) -> str:
    if "\n" in text or len(text) > LONGEST_NAME:
        raise refused(f"must be text on one line with at most {LONGEST_NAME} characters")
    return text


def _id(text: str) -> str:
    if not re.fullmatch(r"[a-z][a-z0-9_]{0,63}", text):
        raise refused("must begin with a small letter and hold only a to z, 0 to 9 and _, at most 64 of them")
    return text


def _test(word: str) -> str:
    return _known(word, (*STATISTICAL_TESTS, *availability.TESTS), STATISTICAL_TESTS.kind)


def _procedure(word: str) -> str:
    return _known(word, (*PROCEDURES, *availability.PROCEDURES_LATER), PROCEDURES.kind)


def _known(word: str, words: tuple[str, ...], kind: str) -> str:
    if word in words:
        return word
    near = difflib.get_close_matches(word, words, n=1, cutoff=0.5)
    hint = f"The nearest name is '{near[0]}'." if near else "`beforehand methods` lists them."
    raise sentence(f"no {kind} is called '{word}'. {hint}")


def _version(written: Any) -> Any:
    if written is not True and isinstance(written, (int, float)) and written == 1:
        return 1
    raise refused("must be 1, the version of the spec language that this program reads")


def _differ(values: tuple[Any, ...]) -> tuple[Any, ...]:
    twice = [value for place, value in enumerate(values) if value in values[:place]]
    if twice:
        raise refused(f"names '{twice[0]}' twice")
    return values


def _ascending(pair: tuple[float, float]) -> tuple[float, float]:
    if not pair[0] < pair[1]:
        raise refused("must be two numbers, the smaller first")
    return pair


Id = Annotated[str, AfterValidator(_id), Field(json_schema_extra={"pattern": "^[a-z][a-z0-9_]*$"})]
Name = Annotated[str, AfterValidator(_name)]
StatisticalTestWord = Annotated[str, AfterValidator(_test)]
ProcedureWord = Annotated[str, AfterValidator(_procedure)]
Reference = Annotated[str, AfterValidator(_name)]
Code = Annotated[str, AfterValidator(_code)]
Prose = Annotated[str, AfterValidator(_claim), Field(max_length=LONGEST_PROSE)]
Date = Annotated[str, AfterValidator(_date), Field(json_schema_extra={"format": "date"})]
FilePath = Annotated[str, AfterValidator(_path)]
FolderPath = Annotated[str, AfterValidator(_folder)]
Condition = Annotated[str, AfterValidator(_expression)]
Formula = Annotated[str, AfterValidator(_expression)]

Names = Annotated[tuple[Name, ...], Field(min_length=1), AfterValidator(_differ)]
Codes = Annotated[tuple[Code, ...], AfterValidator(_differ)]
Levels = Annotated[tuple[Name, ...], Field(min_length=2), AfterValidator(_differ)]
References = Annotated[tuple[Reference, ...], Field(min_length=1), AfterValidator(_differ)]
Range = Annotated[tuple[float, float], AfterValidator(_ascending)]

Version = Annotated[int, BeforeValidator(_version), Field(json_schema_extra={"const": 1})]
Level = Annotated[Exact, _between(0, 0.5, "a number between 0 and 0.5")]
Confidence = Annotated[Exact, _between(0.5, 1, "a number between 0.5 and 1")]
Probability = Annotated[Exact, _between(0, 1, "a number between 0 and 1")]
Weight = Annotated[Exact, _between(0, float("inf"), "a number above 0")]
Share = Annotated[
    Exact | str,
    BeforeValidator(_share),
    Field(json_schema_extra={"anyOf": [{"type": "number"}, {"type": "string"}]}),
]
