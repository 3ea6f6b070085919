"""The command line: one file per command group, loaded only when that command is asked for."""
