"""``python -m fem_flow`` is ``fem-flow``."""

import sys

from fem_flow.cli import main

if __name__ == "__main__":
    sys.exit(main())
