"""What can go wrong, told so that a keeper can act on it.

Every error a user can meet is a `PairingError`. It holds its data beside the message, so
that the command line can lay it out and a program can look into it. One place, `cli.app`,
turns it into text and an exit status.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from collections.abc import Sequence


class PairingError(Exception):
    """Something the user can mend.

    Attributes
    ----------
    headline
        One sentence: what could not be done.
    details
        One line a fault, each with where, what was found, what was expected.
    remedy
        What to do next, or an empty string.
    exit_status
        2 when the call or its input could not be used, 1 when the answer is "no".
    """

    exit_status = 2

    def __init__(self, headline: str, *, details: Sequence[str] = (), remedy: str = "") -> None:
        self.headline = headline
        self.details = tuple(details)
        self.remedy = remedy
        super().__init__("\n".join([headline, *self.details, *([remedy] if remedy else [])]))


class RecordsError(PairingError):
    """The records could not be read, or leave kinship undefined."""


class PolicyError(PairingError):
    """The programme's policy could not be read, or asks for what this version cannot do."""


class UnknownAnimalError(PairingError):
    """An animal was named that is not in the records."""


class KinshipError(PairingError):
    """Kinship was asked for in a way that cannot be answered."""


class OptionError(PairingError):
    """An option of the call cannot be used as given."""


class NoPlanError(PairingError):
    """No set of pairs meets every limit; `clash` names the smallest set of limits that cannot hold.

    The call was sound and the answer is "no": exit status 1.
    """

    exit_status = 1

    def __init__(
        self,
        headline: str,
        *,
        clash: Sequence[str],
        details: Sequence[str] = (),
        remedy: str = "",
    ) -> None:
        self.clash = tuple(clash)
        super().__init__(headline, details=details, remedy=remedy)
