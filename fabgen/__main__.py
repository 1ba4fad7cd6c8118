"""``python -m fabgen``."""

import sys

from fabgen.cli import main

sys.exit(main())
