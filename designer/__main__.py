"""`python -m designer` is `leapwright`."""

import sys

from designer.cli import main

sys.exit(main())
