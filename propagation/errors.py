"""What can go wrong in a published model.

PropagationError
├── RangeError (ValueError)      an input outside the Recommendation
├── ProfileError (ValueError)    a profile that is no path
└── MapError (ValueError)        a digital map that is missing or damaged
"""


class PropagationError(Exception):
    """Root of the package."""


class RangeError(PropagationError, ValueError):
    """An input outside the range of the Recommendation: says which range."""


class ProfileError(PropagationError, ValueError):
    """A profile that is no path: unordered, too short or with missing heights."""


class MapError(PropagationError, ValueError):
    """A digital map that is missing or not of the published form."""
