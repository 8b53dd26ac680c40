"""`python -m qcreport` is the same as `qcreport`."""

import sys

from qcreport.cli import main

if __name__ == "__main__":
    sys.exit(main())
