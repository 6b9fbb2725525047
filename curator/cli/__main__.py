"""`python -m curator.cli`: the command where no script is installed."""

import sys

from curator.cli.main import main

sys.exit(main())
