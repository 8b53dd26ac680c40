"""One module a command: read the arguments, call the room that does it, print, return the exit code."""
