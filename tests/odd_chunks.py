"""Chunks for tests of the machinery alone: they leave a trace of every run, and some kill their worker.

Worker processes import this module, so it stands where they find it.
"""

from __future__ import annotations

import os
import signal
import time
from dataclasses import dataclass
from multiprocessing.connection import Connection
from pathlib import Path

from ratomega.workers.chunks import STAMP


def trace(folder: str, name: str) -> None:
    """One line in the log of a folder, written in one piece: process id and name."""
    handle = os.open(Path(folder, "log"), os.O_WRONLY | os.O_APPEND | os.O_CREAT)
    os.write(handle, f"{os.getpid()} {name}\n".encode())
    os.close(handle)


def traces(folder) -> list[tuple[int, str]]:
    path = Path(folder, "log")
    lines = path.read_text().splitlines() if path.exists() else []
    return [(int(line.split()[0]), line.split()[1]) for line in lines]


@dataclass(frozen=True)
class Marked:
    """Leaves its trace and gives its name back."""

    folder: str
    name: str
    seconds: float = 0.0
    cost: float = 0.1
    stamp: str = STAMP

    def key(self) -> str:
        return self.name

    def run(self) -> str:
        trace(self.folder, self.name)
        time.sleep(self.seconds)
        return f"result of {self.name}"


@dataclass(frozen=True)
class Held(Marked):
    """Waits, the first time that it is run, to be killed from outside."""

    def run(self) -> str:
        first = self.name not in [name for _, name in traces(self.folder)]
        trace(self.folder, self.name)
        if first:
            time.sleep(600)
        return f"result of {self.name}"


@dataclass(frozen=True)
class Patient(Marked):
    """Waits until another chunk has been started for the second time."""

    other: str = ""

    def run(self) -> str:
        trace(self.folder, self.name)
        while [name for _, name in traces(self.folder)].count(self.other) < 2:
            time.sleep(0.01)
        return f"result of {self.name}"


@dataclass(frozen=True)
class Deadly(Marked):
    """Kills its worker, always."""

    def run(self) -> str:
        trace(self.folder, self.name)
        os.kill(os.getpid(), signal.SIGKILL)
        return ""


@dataclass(frozen=True)
class Interrupted(Marked):
    """Ctrl-C reaches its worker in the middle."""

    def run(self) -> str:
        os.kill(os.getpid(), signal.SIGINT)
        return super().run()


@dataclass(frozen=True)
class Wrong(Marked):
    """Has an error."""

    def run(self) -> str:
        raise ZeroDivisionError("the error of a chunk")


@dataclass(frozen=True)
class Surroundings(Marked):
    """What a worker finds in its environment."""

    def run(self) -> str:
        return " ".join(f"{key}={os.environ.get(key)}" for key in ("OMP_NUM_THREADS", "OPENBLAS_NUM_THREADS"))


@dataclass(frozen=True)
class BreaksOff(Marked):
    """The first time that it is run, its worker gets no further than the half of sending the result: then it dies, or,
    with ``seconds``, hangs."""

    def run(self) -> str:
        first = self.name not in [name for _, name in traces(self.folder)]
        trace(self.folder, self.name)
        if first:
            send = Connection._send

            def half(connection, data, *rest):
                send(connection, data[: len(data) // 2], *rest)
                trace(self.folder, "half")
                if not self.seconds:
                    os.kill(os.getpid(), signal.SIGKILL)
                time.sleep(self.seconds)

            Connection._send = half
        return f"result of {self.name}"
