"""The JSON Schemas that ship with the program."""

from __future__ import annotations

import json
from importlib.resources import files
from typing import Any


def schema(kind: str) -> dict[str, Any]:
    """Return the JSON Schema (2020-12) of "estimate" or "ranking"."""
    text = files("ridercda.report").joinpath(f"schema/{kind}.json").read_text(encoding="utf-8")
    loaded: dict[str, Any] = json.loads(text)
    return loaded
