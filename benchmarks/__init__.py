"""Measurements of accuracy, speed, memory and bytes; nothing here is asserted as a time in a test."""

import plateside  # noqa: F401  the layers on the import path, and BLAS as the program has it: one thread
