"""What each key of the study file may be, in words, read off the models that check it."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from functools import partial
from types import UnionType
from typing import Annotated, Any, Literal, Union, get_args, get_origin

from pydantic import BeforeValidator

from canopy.section import Section

TEXTS: dict[type, str] = {
    float: "a number",
    int: "a whole number",
    str: "a text in quotes",
    bool: "true or false",
}


def section_of(annotation: Any) -> type[Section] | None:
    """Return the table that an annotation holds, through `| None`, list and Annotated."""
    if isinstance(annotation, type) and issubclass(annotation, Section):
        return annotation
    found = (section_of(part) for part in get_args(annotation))
    return next((one for one in found if one is not None), None)


def model_at(root: type[Section], where: Iterable[str | int]) -> type[Section] | None:
    """Return the table at a place in the study, or None where no table stands."""
    model: type[Section] | None = root
    for part in where:
        if isinstance(part, int):
            continue
        info = model.model_fields.get(part) if model is not None else None
        model = section_of(info.annotation) if info is not None else None
    return model


def allowed_at(root: type[Section], where: Sequence[str | int]) -> str:
    """Return in words what may stand at a key, or "" where there is no such key."""
    names = [at for at, part in enumerate(where) if isinstance(part, str)]
    if not names:
        return ""
    last = names[-1]
    model = model_at(root, where[:last])
    info = model.model_fields.get(str(where[last])) if model is not None else None
    if info is None:
        return ""
    kind: Any = info.annotation
    for _ in where[last + 1 :]:  # an entry of a list
        kind = _entry(kind)
    return words(kind, info.metadata if len(where) == last + 1 else ())


def choices_at(root: type[Section], where: Sequence[str | int]) -> tuple[str, ...]:
    """Return the fixed choices of a key, or nothing."""
    model = model_at(root, where[:-1])
    info = model.model_fields.get(str(where[-1])) if model is not None and where else None
    return _choices(info.annotation) if info is not None else ()


def words(kind: Any, metadata: Sequence[Any] = ()) -> str:
    """Return in words what an annotation admits, e.g. "a whole number, 1 to 200"."""
    extra = [*metadata]
    while get_origin(kind) is Annotated:
        kind, *more = get_args(kind)
        extra = [*more, *extra]
    own = next((text for item in extra if (text := _parsed(item))), "")
    if own:
        return own
    if get_origin(kind) in (Union, UnionType):
        return " or ".join(words(arm, extra) for arm in get_args(kind) if arm is not type(None))
    if choices := _choices(kind):
        return " or ".join(f'"{choice}"' for choice in choices)
    if get_origin(kind) is list:
        return _list_words(kind, extra)
    if section_of(kind) is not None or kind is dict or get_origin(kind) is dict:
        return "a table"
    span = _span(extra)
    if kind is float and span:
        return span
    return ", ".join(text for text in (TEXTS.get(kind, "a value"), span) if text)


def _list_words(kind: Any, extra: Sequence[Any]) -> str:
    inner = get_args(kind)[0]
    if section_of(inner) is not None:
        text = "[[...]] tables"
    elif get_origin(inner) is list:
        text = "a list of lists"
    else:
        text = f"a list of {'texts' if _is_text(inner) else words(inner)}"
    least, most = _bound(extra, "min_length"), _bound(extra, "max_length")
    count = f"{least or 0:g} to {most:g}" if most is not None else ""
    return f"{text}, {count} entries" if count else text


def _is_text(kind: Any) -> bool:
    return kind is str or (get_origin(kind) is Annotated and get_args(kind)[0] is str)


def _entry(kind: Any) -> Any:
    while get_origin(kind) in (Annotated, Union, UnionType):
        kind = get_args(kind)[0]
    return get_args(kind)[0] if get_origin(kind) is list else kind


def _choices(kind: Any) -> tuple[str, ...]:
    if get_origin(kind) is Literal:
        return tuple(str(choice) for choice in get_args(kind))
    if get_origin(kind) in (Union, UnionType, Annotated):
        return next((hit for arm in get_args(kind) if (hit := _choices(arm))), ())
    return ()


def _parsed(item: Any) -> str:
    """Return the words of a parser that carries them: numbers by date, days."""
    if not isinstance(item, BeforeValidator):
        return ""
    func: Any = item.func
    if isinstance(func, partial) and "low" in func.keywords:
        return f'{func.keywords["low"]:g} to {func.keywords["high"]:g}, or [["MM-DD", number], ...]'
    return str(getattr(func, "words", ""))


def _bound(extra: Sequence[Any], name: str) -> float | None:
    for item in extra:
        for one in (item, *getattr(item, "metadata", ())):
            value = getattr(one, name, None)
            if isinstance(value, int | float):
                return float(value)
    return None


def _span(extra: Sequence[Any]) -> str:
    low, above = _bound(extra, "ge"), _bound(extra, "gt")
    high = _bound(extra, "le")
    if low is not None and high is not None:
        return f"{low:g} to {high:g}"
    if above is not None and high is not None:
        return f"above {above:g}, up to {high:g}"
    least, most = _bound(extra, "min_length"), _bound(extra, "max_length")
    if most is not None:
        return f"{least or 0:g} to {most:g} characters"
    return ""
