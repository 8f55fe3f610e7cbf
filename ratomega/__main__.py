"""``python -m ratomega`` is the command ``ratomega``."""

from ratomega.cli.main import main

if __name__ == "__main__":
    main()
