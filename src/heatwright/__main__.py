"""``python -m heatwright``."""

from heatwright.cli.main import main

if __name__ == "__main__":
    main()
