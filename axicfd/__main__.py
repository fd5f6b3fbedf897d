"""`python -m axicfd` is the command `axicfd`."""

from axicfd.cli.app import main

if __name__ == "__main__":
    raise SystemExit(main())
