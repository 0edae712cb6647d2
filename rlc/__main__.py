"""``python -m rlc``."""

from rlc.cli import main

if __name__ == "__main__":
    main()
