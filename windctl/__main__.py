"""`python -m windctl`: the same as the console script."""

from windctl.cli.entry import main

if __name__ == "__main__":
    main()
