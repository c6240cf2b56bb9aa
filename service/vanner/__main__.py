"""`python -m vanner` is the same as the console command."""

from vanner.cli import main

if __name__ == "__main__":
    main()
