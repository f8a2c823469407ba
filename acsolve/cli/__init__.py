"""The command line: arguments in, answers and an exit status out."""
