"""`python -m drc_power` is `drc-power`."""

import sys

from .cli import main

sys.exit(main())
