"""The command line: one module a command; read, compute, write, no physics.

A command module `filmstack/cli/NAME.py` has three names:

- `HELP`: what the command does, a sentence or two for `filmstack NAME --help`;
- `add_arguments(parser)`: its arguments, shared options by `filmstack.cli.options.add_options`;
- `run(options) -> int`: does the work, prints the result, returns the exit status (0 done,
  1 a requirement is not met).

It raises a `FilmstackError` for wrong input and never prints an error or exits itself:
`filmstack.cli.main.main` alone does that. Heavy libraries are imported inside the functions that
need them. A new command is one module and one line of `COMMANDS` in `main.py`.
"""
