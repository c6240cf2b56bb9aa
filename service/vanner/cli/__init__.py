"""The command line."""


def main() -> None:
    """Run the console command."""
    raise SystemExit("The commands are not built yet.")
