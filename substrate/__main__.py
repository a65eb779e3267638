"""`python -m substrate` is the command `substrate`."""

import sys

from substrate.command import main

sys.exit(main())
