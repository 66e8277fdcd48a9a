"""The version of the program; the wheel's is read from here."""

VERSION = "0.1.0"
