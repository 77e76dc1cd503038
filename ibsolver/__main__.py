"""`python -m ibsolver` is `ibsolver`."""

from __future__ import annotations

import sys

from ibsolver.cli import main

sys.exit(main())
