"""The command line: parses, calls an action, shows."""
