"""Run the command line with ``python -m digestplan``."""

import sys

from digestplan.cli.main import main

sys.exit(main())
