"""One file per command: `SUMMARY`, `add_arguments(parser)` and `run(arguments) -> exit status`.

Their top level imports only the standard library and other light modules, so that help appears at once.
"""
