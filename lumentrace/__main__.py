"""`python -m lumentrace` is the command `lumentrace`."""

from lumentrace.cli.main import main

if __name__ == "__main__":
    main()
