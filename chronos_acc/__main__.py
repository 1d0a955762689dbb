# SPDX-License-Identifier: Apache-2.0
"""``python -m chronos_acc``."""

from .cli import main

if __name__ == "__main__":
    raise SystemExit(main())
