"""What every section of a case shares: frozen, strict, finite, and no key that nobody asked for."""

from __future__ import annotations

from pydantic import BaseModel, ConfigDict


class Section(BaseModel):
    """Base of all sections. Unknown is None; a wrong type, an extra key or a NaN is refused, never repaired."""

    model_config = ConfigDict(
        frozen=True,
        extra="forbid",
        strict=True,
        allow_inf_nan=False,
        validate_default=False,
    )
