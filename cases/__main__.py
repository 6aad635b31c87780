"""``python -m modewright.cases`` is the command ``modewright``."""

import sys

from .command import main

sys.exit(main())
