"""The text of a case file: TOML to typed tables, or one clear message."""

from __future__ import annotations

import tomllib
from typing import TYPE_CHECKING, Any, TypeVar, get_args

from pydantic import BaseModel, ValidationError

from orolift.errors import CaseError
from orolift.sources.case_model import Case
from orolift.sources.units import UNITS, alternatives, nearest, suffix_of

if TYPE_CHECKING:
    from pydantic_core import ErrorDetails

Model = TypeVar("Model", bound=BaseModel)


def case_from_text(text: str, name: str) -> Case:
    r"""Case of TOML text; `name` stands for the file in messages.

    Raises
    ------
    CaseError
        If a key is missing, unknown, of the wrong unit or out of range, or the
        TOML itself is broken; the message names file, key or line.

    Examples
    --------
    >>> case_from_text("[terrain]\nridge_file = 'ridge.csv'", "storm.toml")
    Traceback (most recent call last):
        ...
    orolift.errors.CaseError: storm.toml: [incoming] is missing. docs/case.md lists every key.
    """
    data = toml_data(text, name)
    if not data:
        raise CaseError(f"{name}: holds no keys. 'orolift starter DIR' writes a case to edit.")
    return validated(Case, data, name)


def toml_data(text: str, name: str) -> dict[str, Any]:
    """What stands in TOML text; `name` stands for the file in messages.

    Raises
    ------
    CaseError
        If it is not valid TOML.
    """
    try:
        return tomllib.loads(text)
    except tomllib.TOMLDecodeError as error:
        raise CaseError(f"{name}: not valid TOML: {error}. Text needs quotes, tables stand in [brackets].") from error
    except RecursionError as error:
        raise CaseError(f"{name}: not valid TOML: nested too deeply.") from error


def validated(root: type[Model], data: dict[str, Any], name: str) -> Model:
    """Typed tables of TOML data; `name` stands for the file in messages.

    Raises
    ------
    CaseError
        If a key is missing, unknown, of the wrong unit or out of range.
    """
    given: dict[tuple[str, str], str] = {}
    try:
        return root.model_validate(data, context=given)
    except ValidationError as error:
        faults = sorted(error.errors(include_url=False), key=lambda fault: fault["type"] != "extra_forbidden")
        message = _message(faults[0], given, root)
        more = f" ({len(faults) - 1} more to mend after this one.)" if len(faults) > 1 else ""
        raise CaseError(f"{name}: {message}{more}") from error


def _message(fault: ErrorDetails, given: dict[tuple[str, str], str], root: type[BaseModel]) -> str:
    """One sentence on one fault, in the words of the file."""
    loc = fault["loc"]
    model = _model_at(loc[:-1], root)
    key = str(loc[-1]) if loc else ""
    place = _place(loc, root)
    kind = fault["type"]
    if kind == "extra_forbidden":
        return f"{place}: {_unknown(key, model)}"
    if kind == "missing":
        return f"{place} is missing. docs/case.md lists every key."
    if kind in {"value_error", "assertion_error"}:
        inner = fault.get("ctx", {}).get("error", fault["msg"])
        return f"{place}: {inner}." if place else f"{inner}."
    origin = given.get((model.__name__, key)) if model else None
    also = f" (given as {origin})" if origin else ""
    return f"{place}{also}: {_wrong_value(fault, model, key)}"


def _place(loc: tuple[int | str, ...], root: type[BaseModel]) -> str:
    """Location as a person would look for it: ``[incoming] station.temperature_c``."""
    if not loc:
        return ""
    tables = {key for key, field in root.model_fields.items() if _model_in(field.annotation) is not None}
    first, rest = str(loc[0]), [f"item {part + 1}" if isinstance(part, int) else part for part in loc[1:]]
    head = f"[{first}]" if first in tables else first
    if rest and rest[0].startswith("item "):
        head = f"[[{first}]] {rest.pop(0)}"
    return " ".join(part for part in (head, ".".join(rest).replace(".item", ", item")) if part)


def _model_at(loc: tuple[int | str, ...], root: type[BaseModel]) -> type[BaseModel] | None:
    """Table class that the keys at a location belong to."""
    model: type[BaseModel] | None = root
    for part in loc:
        if isinstance(part, int):
            continue
        if model is None or part not in model.model_fields:
            return None
        model = _model_in(model.model_fields[part].annotation)
    return model


def _model_in(annotation: Any) -> type[BaseModel] | None:
    if isinstance(annotation, type) and issubclass(annotation, BaseModel):
        return annotation
    return next((found for inner in get_args(annotation) if (found := _model_in(inner)) is not None), None)


def _unknown(key: str, model: type[BaseModel] | None) -> str:
    """What is wrong with a key that the table does not have."""
    if model is None:
        return "unknown key."
    fields = list(model.model_fields)
    parts = suffix_of(key)
    if parts is not None:
        same = next((name for name in fields if (own := suffix_of(name)) is not None and own[0] == parts[0]), None)
        if same is not None:
            allowed = ", ".join([same, *alternatives(same)])
            return f"a {UNITS[parts[1]].kind} unit does not fit here. Use one of: {allowed}."
    by_stem = {(own[0] if (own := suffix_of(name)) else name): name for name in fields}
    choices = [*fields, *(other for name in fields for other in alternatives(name))]
    close = nearest(key, choices) or by_stem.get(nearest(key, by_stem) or "")
    hint = f"Did you mean {close}?" if close else f"Known here: {', '.join(fields)}."
    return f"unknown key. {hint}"


def _wrong_value(fault: ErrorDetails, model: type[BaseModel] | None, key: str) -> str:
    value = fault["input"]
    shown = f"'{value}'" if isinstance(value, str) else f"{value}"
    shown = shown if len(shown) <= 60 else f"{shown[:57]}..."
    kind = fault["type"]
    limits = _limits(model, key)
    if kind in {"greater_than_equal", "less_than_equal", "greater_than", "less_than"}:
        return f"{float(value):g} is outside {limits}."
    if kind == "finite_number":
        return f"{shown} is not a number that can be used; give one within {limits}."
    if kind == "literal_error":
        return f"{shown} is not one of {fault.get('ctx', {}).get('expected', '')}."
    words = {
        "float_type": "a number is needed",
        "int_type": "a whole number is needed",
        "string_type": "text in quotes is needed",
        "bool_type": "true or false is needed",
        "list_type": "a list in [brackets] is needed",
        "model_type": "a table is needed, { key = value }",
        "date_type": "a date is needed, for example 2026-05-01 without quotes",
        "datetime_type": "a date and time is needed, for example 2026-11-03T12:00:00Z without quotes",
        "string_too_short": "the text is empty",
        "string_too_long": "the text is longer than 200 characters",
    }
    return f"{words.get(kind, fault['msg'])}, and {shown} is given."


def _limits(model: type[BaseModel] | None, key: str) -> str:
    """Allowed range of a number in words, read off the model."""
    if model is None or key not in model.model_fields:
        return "the allowed range"
    field = model.model_fields[key]
    marks = [*field.metadata]
    for inner in get_args(field.annotation):
        marks += getattr(inner, "__metadata__", ())
    marks += [inner for mark in marks for inner in getattr(mark, "metadata", ())]
    bounds = {name: getattr(mark, name) for mark in marks for name in ("ge", "gt", "le") if hasattr(mark, name)}
    if "gt" in bounds and "le" in bounds:
        return f"the range above {bounds['gt']:g} and up to {bounds['le']:g}"
    if "ge" in bounds and "le" in bounds:
        return f"{bounds['ge']:g} to {bounds['le']:g}"
    return "the allowed range"
