"""The command line: thin. Parses, calls one step, prints what came back."""
