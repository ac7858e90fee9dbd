"""`python -m wellseq` is the command `wellseq`."""

import sys

from wellseq.cli.main import main

sys.exit(main())
