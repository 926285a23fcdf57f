"""Print what whole commands cost beside the libraries they stand on, as ratios in one run.

``python tests/bench/bench_speed.py``

The processor time of each command and of its baseline are taken in turns; the medians are compared.
"""

from __future__ import annotations

import resource
import statistics
import subprocess
import sys
import tempfile
from collections.abc import Sequence
from pathlib import Path

ROUNDS = 5
DISHWRIGHT = str(Path(sys.executable).with_name("dishwright"))
PAIRS = (
    ("make of the demo", [DISHWRIGHT, "make"], "import numpy, scipy.optimize, ezdxf, shapely", 3.0),
    ("--help", [DISHWRIGHT, "--help"], "import typer", 2.0),
)


def _processor_time(command: Sequence[str]) -> float:
    with tempfile.TemporaryDirectory() as folder:
        before = resource.getrusage(resource.RUSAGE_CHILDREN)
        subprocess.run(command, cwd=folder, check=True, stdout=subprocess.DEVNULL)
        after = resource.getrusage(resource.RUSAGE_CHILDREN)
    return after.ru_utime + after.ru_stime - before.ru_utime - before.ru_stime


def main() -> None:
    """Print the ratios."""
    for name, command, baseline, allowed in PAIRS:
        pairs = [(_processor_time(command), _processor_time([sys.executable, "-c", baseline])) for _ in range(ROUNDS)]
        ours, theirs = (statistics.median(column) for column in zip(*pairs, strict=True))
        print(f"{name}: {ours:.2f} s; python -c '{baseline}': {theirs:.2f} s")
        print(f"{'':<4}ratio {ours / theirs:.2f}, at most {allowed}")


if __name__ == "__main__":
    main()
