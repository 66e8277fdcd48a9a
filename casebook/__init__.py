"""What happened: the durable log of cases, its search, history and merge."""
