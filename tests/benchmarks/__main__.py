"""Print every benchmark: `python -m tests.benchmarks [model] [window]`."""

import os
import sys

for name in ("OPENBLAS_NUM_THREADS", "MKL_NUM_THREADS", "OMP_NUM_THREADS"):
    os.environ.setdefault(name, "1")


def main() -> int:
    from tests.benchmarks import model, window

    wanted = sys.argv[1:] or ["model", "window"]
    for name, module in (("model", model), ("window", window)):
        if name in wanted:
            print(f"-- {name}", flush=True)
            for line in module.lines():
                print(line.text(), flush=True)
    return 0


if __name__ == "__main__":
    sys.exit(main())
