import sys

from screener.cli import main

sys.exit(main())
