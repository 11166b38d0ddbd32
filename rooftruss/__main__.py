"""``python -m rooftruss``."""

import sys

from rooftruss.cli import main

sys.exit(main())
