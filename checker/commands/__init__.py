"""Hold the commands: each module says what its command takes, and runs it."""
