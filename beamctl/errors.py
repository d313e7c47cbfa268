"""Every error a person may meet, split by whose hands can mend it.

    BeamctlError
    ├── ShowError      the files: what is written in the show folder
    ├── DeviceError    the machine: sinks, memory, a lost process
    │   └── ContractError  a sink that does not offer the rate or the channels of the rig
    └── PeerError      the network: a sender; counted and shown, never raised past osc/

Each carries what is wrong and, on its own line, what to do about it.
"""

from __future__ import annotations


class BeamctlError(Exception):
    """Base of the tree; never raised itself. `exit_code` is what the command line returns."""

    exit_code = 1

    def __init__(self, what: str, do: str = "") -> None:
        super().__init__(what)
        self.what = what
        self.do = do

    def __str__(self) -> str:
        return f"{self.what}\n  {self.do}" if self.do else self.what


class ShowError(BeamctlError):
    """The show folder holds something that cannot be played."""

    exit_code = 2


class DeviceError(BeamctlError):
    """The machine cannot do what the rig needs."""

    exit_code = 4

    def __init__(self, what: str, do: str = "", exit_code: int | None = None) -> None:
        super().__init__(what, do)
        if exit_code is not None:
            self.exit_code = exit_code


class ContractError(DeviceError):
    """A sink is there, but does not offer the rate or the channels that the rig needs."""

    exit_code = 6


class PeerError(BeamctlError):
    """A sender on the network broke the protocol."""

    exit_code = 5
