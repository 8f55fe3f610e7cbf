"""``python -m benchmarks``: how fast, against what. Ratios are measured in this one run, on the same work.

Names of questions choose among them. Every time is a median of three. ``--quick`` takes small sizes, ``--long`` adds
what takes many minutes; ``--json FILE`` also writes all figures, with the environment.
"""

if __name__ == "__main__":
    # Not above: every worker process that a benchmark starts imports this module, and needs none of the questions.
    from benchmarks.questions import main

    main()
