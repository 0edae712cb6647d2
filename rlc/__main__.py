"""The process: ``rlc``, or ``python -m rlc``."""

import gc
import os


def main() -> None:
    """Run the command line, with what a short answer's time goes into kept small."""
    # Imports make many objects and no garbage; collecting in between takes a twentieth of the time.
    gc.disable()
    # The largest product here is of 4 by 4 matrices; starting threads for it takes longer.
    os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")
    from rlc.cli import app

    app()


if __name__ == "__main__":
    main()
