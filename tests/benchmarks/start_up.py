"""How long the cheap calls take, as multiples of ``python -c "import numpy"`` in the same environment.

Run it on a quiet machine: ``python tests/benchmarks/start_up.py``. ``import fem_flow`` and ``--version`` should stay below 3,
``--help`` below 5. The best of several rounds counts: whatever else the machine does only adds.
"""

import shutil
import subprocess
import sys
import time

ROUNDS = 20
COMMAND = shutil.which("fem-flow") or sys.exit("fem-flow is not on the path")
CALLS = {
    "python -c pass": ([sys.executable, "-c", "pass"], None),
    "import numpy": ([sys.executable, "-c", "import numpy"], None),
    "import fem_flow": ([sys.executable, "-c", "import fem_flow"], 3),
    "fem-flow --version": ([COMMAND, "--version"], 3),
    "fem-flow --help": ([COMMAND, "--help"], 5),
    "fem-flow run --help": ([COMMAND, "run", "--help"], 5),
}


def seconds(command: list[str]) -> float:
    start = time.perf_counter()
    subprocess.run(command, check=True, stdout=subprocess.DEVNULL)
    return time.perf_counter() - start


def main() -> int:
    """Print the table; exit code 1 where a limit is passed."""
    best = dict.fromkeys(CALLS, float("inf"))
    for _ in range(ROUNDS):
        for name, (command, _limit) in CALLS.items():
            best[name] = min(best[name], seconds(command))
    unit = best["import numpy"]
    print(f"{'call':<22}{'ms':>8}{'ratio':>8}{'limit':>8}")
    for name, (_command, limit) in CALLS.items():
        print(f"{name:<22}{1e3 * best[name]:>8.0f}{best[name] / unit:>8.2f}{limit or '':>8}")
    return int(any(limit and best[name] > limit * unit for name, (_command, limit) in CALLS.items()))


if __name__ == "__main__":
    sys.exit(main())
