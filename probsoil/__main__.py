"""Entry point of ``python -m probsoil``."""

import sys

from probsoil.cli import main

if __name__ == "__main__":
    sys.exit(main())
