"""Run trials by name, or all: documented, killed, crowded, mutated, files."""

import sys
import time
from collections.abc import Callable

from tests.trials import crowded, documented, files, killed, mutated

TRIALS: dict[str, list[Callable[[], str]]] = {
    "documented": [documented.run],
    "crowded": [lambda: crowded.run("sqlite"), lambda: crowded.run("postgresql")],
    "mutated": [mutated.run],
    "files": [files.run],
    "killed": [lambda: killed.run("sqlite"), lambda: killed.run("postgresql")],
}


def main() -> int:
    """Run what was asked for; the status tells whether all of it held."""
    held = True
    for name in sys.argv[1:] or TRIALS:
        for trial in TRIALS[name]:
            began = time.monotonic()
            try:
                print(f"{name}: {trial()} ({time.monotonic() - began:.0f} s)", flush=True)
            except Exception as error:
                held = False
                print(f"{name}: FAILED: {type(error).__name__}: {error}", flush=True)
    return 0 if held else 1


if __name__ == "__main__":
    sys.exit(main())
