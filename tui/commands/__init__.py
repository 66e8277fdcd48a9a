"""One module per command: ``run(arguments)`` does it and returns the exit status."""
