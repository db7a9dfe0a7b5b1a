"""The command line: options to arguments, findings to exit status."""
