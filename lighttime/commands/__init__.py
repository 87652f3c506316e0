"""The commands of the command line.

A command is a module with ``add(subparsers)``, which describes its options and sets the default
``run``, and ``run(arguments) -> int``, which does the work and returns the exit status. It is
listed in `lighttime.cli.COMMANDS`.
"""
