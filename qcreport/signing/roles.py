"""What a person may sign a report as, and the field of each."""

from __future__ import annotations

from typing import Final

from qcreport.signing.seal import PERSON_FIELDS

ROLES: Final = ("reviewed", "authorised")
"""In the order in which a report is signed."""
FIELD_OF_ROLE: Final = dict(zip(ROLES, PERSON_FIELDS, strict=True))
ROLE_OF_FIELD: Final = {field: role for role, field in FIELD_OF_ROLE.items()}
