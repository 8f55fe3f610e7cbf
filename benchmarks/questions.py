"""All questions, and the command that asks them."""

from __future__ import annotations

# isort: off
import benchmarks.one_core  # before anything that imports numpy

# isort: on
import argparse
import json
from pathlib import Path

from benchmarks import ball, by_sympy, direct, growth, memory, parameters, poles, workers
from benchmarks.measure import Pace, Report, environment, load

assert benchmarks.one_core

QUESTIONS = {
    "direct": direct,
    "sympy": by_sympy,
    "ball": ball,
    "poles": poles,
    "growth": growth,
    "memory": memory,
    "parameters": parameters,
    "workers": workers,
}


def main() -> None:
    parser = argparse.ArgumentParser(prog="python -m benchmarks", description="Ratios measured in one run.")
    listed = "; ".join(f"{name}: {module.QUESTION}" for name, module in QUESTIONS.items())
    parser.add_argument("questions", nargs="*", metavar="QUESTION", help=f"which, by default all. {listed}")
    size = parser.add_mutually_exclusive_group()
    size.add_argument("--quick", action="store_true", help="small sizes")
    size.add_argument("--long", action="store_true", help="also what takes many minutes")
    parser.add_argument("--json", type=Path, metavar="FILE", help="write the figures and the environment")
    options = parser.parse_args()
    unknown = [name for name in options.questions if name not in QUESTIONS]
    if unknown:
        parser.error(f"no question is called {', '.join(unknown)}; there are {', '.join(QUESTIONS)}")
    pace = Pace(quick=options.quick, long=options.long)
    surroundings = environment()
    print("; ".join(f"{key} {value}" for key, value in surroundings.items()))
    print("Seconds are processor seconds of one thread, medians of three; imports are not counted.")
    report = Report(lambda line: print(line, flush=True))
    for name, module in QUESTIONS.items():
        if not options.questions or name in options.questions:
            report.question(name, module.QUESTION)
            module.ask(pace, report)
    report.summary()
    surroundings["load_at_the_end"] = load()
    print(f"\nload at the end {surroundings['load_at_the_end']}")
    if options.json is not None:
        options.json.write_text(json.dumps(report.document(surroundings), indent=1) + "\n", encoding="utf-8")

