"""One call of ``ratomega.limit`` in this process, which should be fresh.

``python -m benchmarks.alone '[case, options]'`` prints its times, the peak memory of the process and what the result
says of its route, as JSON.
"""

from __future__ import annotations

# isort: off
import benchmarks.one_core  # before anything that imports numpy

# isort: on
import json
import sys

import ratomega
from benchmarks.measure import peak_mib, timed

assert benchmarks.one_core


def main() -> None:
    mapping, options = json.loads(sys.argv[1])
    case = ratomega.load_case(mapping)
    times, result = timed(ratomega.limit, case, **options)
    answer = {
        "processor": times.processor,
        "elapsed": times.elapsed,
        "peak_mib": peak_mib(),
        "primes": result.route.primes,
        "spare_bits": result.route.spare_bits,
    }
    print(json.dumps(answer))


if __name__ == "__main__":
    main()
