"""Common ground of the scenario's tables."""

from enum import Enum
from typing import Annotated

from pydantic import BaseModel, ConfigDict, StringConstraints

# No dot, because a parameter's address is "name.symbol"; no blank at either end.
NAME_PATTERN = r"^[^\s.](?:[^.\x00-\x1f\x7f]*[^\s.])?$"
RESERVED_NAMES = ("site", "load", "further_loads", "stages", "drains", "model_error")

Name = Annotated[str, StringConstraints(min_length=1, max_length=60, pattern=NAME_PATTERN)]
Label = Annotated[
    str, StringConstraints(min_length=1, max_length=80, pattern=r"^\S(?:[^\x00-\x1f\x7f]*\S)?$")
]


class Unread(Enum):
    """Stands, in a scenario read in part, for what could not be read."""

    UNREAD = "unread"


UNREAD = Unread.UNREAD


class Table(BaseModel):
    """A table of the scenario: it never changes once read and refuses keys it does not know."""

    model_config = ConfigDict(
        frozen=True,
        extra="forbid",
        strict=True,
        arbitrary_types_allowed=True,
        validate_by_name=True,
        validate_by_alias=True,
    )
