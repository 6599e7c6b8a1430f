"""Start of the command line: ``python -m quant`` or ``quant``."""

from quant.cli.main import main

if __name__ == "__main__":
    main()
