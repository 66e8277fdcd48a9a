"""Let the tests find the layers, in a checkout and beside an installed wheel alike."""

import plateside


def pytest_report_header() -> str:
    """Say which copy is under test."""
    return f"plateside from {plateside.__path__[0]}"
