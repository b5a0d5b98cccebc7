"""``python -m explorer`` is the command ``blendwright``."""

import sys

from explorer.cli import main

sys.exit(main())
