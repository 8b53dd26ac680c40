"""The published form of `verify --json`."""

from __future__ import annotations

import json
from functools import cache
from importlib.resources import files
from typing import Any

import jsonschema


@cache
def schema() -> dict[str, Any]:
    """Return the schema as shipped, checked to be one."""
    document: dict[str, Any] = json.loads((files("qcreport") / "schemas" / "verify.schema.json").read_bytes())
    jsonschema.Draft202012Validator.check_schema(document)
    return document
