"""Run the program as ``python -m wanderers``."""

from wanderers.cli.main import main

if __name__ == "__main__":
    main()
