"""What the person who starts the program decides: where the data lives, the address, the limits."""

from __future__ import annotations

import ipaddress
from dataclasses import dataclass
from pathlib import Path

from server.errors import JointError

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

    ``data`` is the folder of the shop's records; ``max_body`` the largest request in bytes, ``max_fields`` the most
    boxes one form may send. Limits are far above what a check needs and far below what would hurt.
    """

    data: Path
    host: str = "127.0.0.1"
    port: int = 8300
    max_body: int = 2 * 1024 * 1024
    max_fields: int = 5000

    def __post_init__(self) -> None:
        if not is_loopback(self.host):
            raise JointError(
                f"The address {self.host} can be reached from other machines, and this version has no sign-in yet. "
                "Use 127.0.0.1, and let people work at this machine."
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
        return LOOPBACK_NAMES | {self.host.strip().strip("[]").lower()}

    @property
    def address(self) -> str:
        """The address to type into a browser."""
        host = f"[{self.host}]" if ":" in self.host else self.host
        return f"http://{host}:{self.port}/"
