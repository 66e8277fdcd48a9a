"""The console script, and ``python -m plateside``."""

from tui.cli import main  # tui.cli imports Textual only when a screen is wanted

if __name__ == "__main__":
    raise SystemExit(main())
