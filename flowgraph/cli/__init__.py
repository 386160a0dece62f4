"""The command line: one module a command, thin over what the other folders do."""
