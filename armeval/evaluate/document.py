"""The JSON documents: one envelope around what each question answers."""

from __future__ import annotations

import json
import math
from collections.abc import Mapping, Sequence
from dataclasses import fields, is_dataclass
from typing import Any

import numpy as np

from armeval._version import __version__

JsonValue = Any


def plain(value: object) -> JsonValue:
    """Turn numpy values, tuples and frozen objects into what JSON knows; a number that is not finite becomes null."""
    if is_dataclass(value) and not isinstance(value, type):
        return {field.name: plain(getattr(value, field.name)) for field in fields(value)}
    if isinstance(value, Mapping):
        return {str(key): plain(entry) for key, entry in value.items()}
    if isinstance(value, np.ndarray):
        return plain(value.tolist())
    if isinstance(value, np.generic):
        return plain(value.item())
    if isinstance(value, Sequence) and not isinstance(value, str):
        return [plain(entry) for entry in value]
    if isinstance(value, float) and not math.isfinite(value):
        return None
    return value


def document(command: str, trial: str, warnings: Sequence[str], content: Mapping[str, object]) -> dict[str, JsonValue]:
    """Wrap an answer: schema, version, trial and warnings first, then the content."""
    return {
        "schema": f"armeval/{command}/1",
        "armeval": __version__,
        "trial": trial,
        "warnings": list(warnings),
        **{key: plain(value) for key, value in content.items()},
    }


def as_text(content: Mapping[str, JsonValue]) -> str:
    """Write a document as JSON text, strictly: no NaN."""
    return json.dumps(content, indent=2, ensure_ascii=False, allow_nan=False) + "\n"
