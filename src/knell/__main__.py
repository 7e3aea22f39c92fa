"""``python -m knell``."""

import sys

from knell.command import main

sys.exit(main())
