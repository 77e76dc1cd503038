"""One file a verb: `add_arguments(parser)`, `EXAMPLES`, `execute(options) -> dict` (what `--json` prints).

Results go to standard output, progress and notes to standard error. Everything heavy is imported inside `execute`.
"""
