"""Where people meet the program: the command line."""
