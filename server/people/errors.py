"""What may go wrong when somebody wants in."""

from __future__ import annotations

from server.errors import JointError


class SignInError(JointError):
    """The name and the password, or the name and the code, do not fit."""


class HeldError(SignInError):
    """Too many tries; ``seconds`` says how long to wait."""

    def __init__(self, seconds: int) -> None:
        wait = f"{seconds} seconds" if seconds < 100 else f"{round(seconds / 60)} minutes"
        super().__init__(
            f"There were too many tries that did not fit. Wait {wait}, then try again; "
            "if the password is forgotten, ask whoever keeps the book for a one-time code."
        )
        self.seconds = seconds


class BusyError(JointError):
    """More people want in at once than passwords can be weighed."""


class NoPersonError(JointError):
    """There is no such person, session or token."""
