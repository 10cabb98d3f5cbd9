"""The base of every table of the study file."""

from __future__ import annotations

from pydantic import BaseModel, ConfigDict


class Section(BaseModel):
    """A table of the study file: unknown keys, wrong types, nan and infinity are refused."""

    model_config = ConfigDict(
        strict=True, extra="forbid", frozen=True, allow_inf_nan=False, arbitrary_types_allowed=True
    )
