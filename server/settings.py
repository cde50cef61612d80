"""What the person who starts the program decides: where the data lives, the address, the limits."""

from __future__ import annotations

import ipaddress
from dataclasses import dataclass
from pathlib import Path

from server.errors import JointError

EVERY_ADDRESS = frozenset({"0.0.0.0", "::", "[::]", ""})  # noqa: S104 -- recognised, not bound to
LOOPBACK_NAMES = frozenset({"localhost", "127.0.0.1", "::1"})


def is_loopback(host: str) -> bool:
    """Return whether ``host`` can be reached from this machine only."""
    name = host.strip().strip("[]").lower()
    if name in LOOPBACK_NAMES:
        return True
    try:
        return ipaddress.ip_address(name).is_loopback
    except ValueError:
        return False


@dataclass(frozen=True)
class Settings:
    """One running program.

    ``data`` is the folder of the shop's records. With ``sign_in`` people sign in, which only a program that this
    machine alone can reach may do without; ``names`` are further host names it answers to. ``max_body`` is the largest
    request in bytes, ``max_fields`` the most boxes one form may send. Both limits are far above what a check needs and
    far below what would hurt.
    """

    data: Path
    host: str = "127.0.0.1"
    port: int = 8300
    sign_in: bool = False
    names: tuple[str, ...] = ()
    max_body: int = 2 * 1024 * 1024
    max_fields: int = 5000

    def __post_init__(self) -> None:
        if not is_loopback(self.host) and not self.sign_in:
            raise JointError(
                f"The address {self.host} can be reached from other machines, which is only done with sign-in. Add "
                "the first person (bondwright person add) or start with --sign-in, which prints a code for the first "
                "person; or use 127.0.0.1, and let people work at this machine."
            )
        if self.host in EVERY_ADDRESS and not self.names:
            raise JointError(
                f"The address {self.host} stands for every address of this machine; say with --name which host names "
                "or addresses people type to reach it, such as --name workshop.local."
            )
        if not 0 <= self.port <= 65535:
            raise JointError(f"The port is {self.port}; give a whole number from 1 to 65535, such as 8300.")

    @property
    def records(self) -> Path:
        """The file of the record book."""
        return self.data / "bondwright.sqlite3"

    @property
    def hosts(self) -> frozenset[str]:
        """The host names this program answers to; any other is somebody else's name for our address."""
        named = {name.strip().strip("[]").rstrip(".").lower() for name in (self.host, *self.names)}
        return LOOPBACK_NAMES | (named - EVERY_ADDRESS)

    @property
    def address(self) -> str:
        """The address to type into a browser."""
        host = self.names[0] if self.names else self.host.strip("[]")
        host = f"[{host}]" if ":" in host else host
        return f"http://{host}:{self.port}/"
