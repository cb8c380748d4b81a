"""The command line: one file a command; nothing but arguments, calls and printing."""
