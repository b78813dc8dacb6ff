"""``python -m driftwell``."""

import sys

from driftwell.cli.main import main

sys.exit(main())
