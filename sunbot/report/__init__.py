"""The answers as people read them: terminal text, plots, JSON and CSV, starter files."""
