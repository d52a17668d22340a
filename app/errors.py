"""What can go wrong in the job itself.

AppError
├── RequestError (ValueError)            a question that cannot be answered as asked
│   └── RoofError                        the place: out of range, at sea, no ground
├── TransmitterFileError (ValueError)    a register or template file
├── ChainError (ValueError)              a chain or a part of it
├── ReadingError (ValueError)            a reading that nobody can have taken
├── NotStoredError (LookupError)         a name or id that the store does not hold
├── StoreError (OSError)                 the data folder or its database
└── ModeError (ValueError)                an unknown system, mode or channel raster

Each message says what came, what is allowed and what to do next.
`field` and `allowed` travel with it for the page.
"""

LONGEST_LINE = 800  # of a message: what came is shown, not a megabyte of it


class AppError(Exception):
    """Root of the package; carries what the page needs to point at the field."""

    def __init__(self, message: str, *, field: str | None = None, allowed: str | None = None) -> None:
        self.message = "\n".join(shortened(line) for line in message.split("\n"))
        super().__init__(self.message)
        self.field = field
        self.allowed = allowed


def shortened(line: str) -> str:
    """Return a line without its middle if it is too long: it begins with what came and ends with what to do."""
    half = LONGEST_LINE // 2
    return line if len(line) <= LONGEST_LINE else f"{line[:half]} … {line[-half:]}"


class RequestError(AppError, ValueError):
    """A question that cannot be answered as it was asked."""


class RoofError(RequestError):
    """The place cannot be a roof: out of range, far out at sea, without ground."""


class TransmitterFileError(AppError, ValueError):
    """A file of transmitters that cannot be read at all (bad rows are listed, not raised)."""


class ChainError(AppError, ValueError):
    """A chain or one of its parts is not possible as described; `part` is the id of that part, if it is one."""

    def __init__(
        self, message: str, *, field: str | None = None, allowed: str | None = None, part: str | None = None
    ) -> None:
        super().__init__(message, field=field, allowed=allowed)
        self.part = part


class ReadingError(AppError, ValueError):
    """A reading that nobody can have taken, or that does not say what it is of."""


class NotStoredError(AppError, LookupError):
    """A name or id that the store does not hold."""


class StoreError(AppError, OSError):
    """The data folder or its database cannot be used."""


class ModeError(AppError, ValueError):
    """A broadcast system, mode or channel raster that is not in the tables."""
