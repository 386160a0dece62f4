"""`python -m flowgraph`."""

import sys

from flowgraph.cli.main import main

sys.exit(main())
