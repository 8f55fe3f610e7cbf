"""``python -m benchmarks`` runs every benchmark and prints ratios measured in this one run."""

from __future__ import annotations

import platform
from importlib.metadata import version

from benchmarks import nearby


def main() -> None:
    packages = ", ".join(f"{name} {version(name)}" for name in ("ratomega", "python-flint", "networkx"))
    print(f"Python {platform.python_version()}, {platform.machine()}; {packages}")
    print("exact limit against the plain evaluation at eps2 (1 + 1/1009); medians of three\n")
    print(nearby.text(nearby.measure()))


if __name__ == "__main__":
    main()
