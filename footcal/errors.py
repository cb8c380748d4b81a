"""The one tree of errors: each says where it happened, what is wrong, and how to mend it.

FootcalError
├── InputError           bad input or use; exit code 2
│   ├── FileFormatError  a file is missing, cut, of the wrong form, or holds a bad value
│   ├── SettingError     an option, a recipe or an argument is out of its range
│   ├── SessionError     the readings and steps of a bench session do not allow what was asked
│   └── FitRefusedError  the data were read, but no sound model follows from them
└── DeviceError          a device or stream failed; exit code 3
"""

from __future__ import annotations

from typing import ClassVar


class FootcalError(Exception):
    """Says where it happened, what is wrong, and how to mend it."""

    exit_code: ClassVar[int] = 2

    def __init__(self, where: str, what: str, mend: str) -> None:
        super().__init__(where, what, mend)
        self.where, self.what, self.mend = where, what, mend

    def __str__(self) -> str:
        return f"{self.where}: {self.what}. {self.mend}"


class InputError(FootcalError):
    """The user's input or use is wrong."""


class FileFormatError(InputError):
    """A file is missing, cut, of the wrong form, or holds a bad value."""


class SettingError(InputError):
    """An option, a recipe or an argument is out of its range."""


class SessionError(InputError):
    """The readings and steps of a bench session do not allow what was asked."""


class FitRefusedError(InputError):
    """The data were read, but no sound model follows from them."""


class DeviceError(FootcalError):
    """A device or a stream failed."""

    exit_code: ClassVar[int] = 3
