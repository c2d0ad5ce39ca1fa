"""``python -m xlaxial`` is the command ``xlaxial``."""

import sys

from xlaxial.cli import main

sys.exit(main())
