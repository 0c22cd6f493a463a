"""The errors a user can mend: each names the thing it is about and what would do.

DesignError
├── InputError     one field is out of range
└── LooseFrame     a joint of the frame moves freely
"""


class DesignError(Exception):
    """Something in the design cannot be; the message is one line a user can act on."""


class InputError(DesignError):
    """One field is out of range; says which, as what it was given, and what would do."""

    def __init__(self, field: str, given: str, remedy: str) -> None:
        super().__init__(f"{field} = {given}: {remedy}")
        self.field, self.given, self.remedy = field, given, remedy


class LooseFrame(DesignError):
    """A joint moves freely; says which, in which direction, and what would hold it."""

    def __init__(self, joint: str, direction: str, remedy: str) -> None:
        super().__init__(f"joint {joint} moves freely in {direction}: {remedy}")
        self.joint, self.direction, self.remedy = joint, direction, remedy
