"""What a person sees: the command line, the screens, and the composing of a case."""
