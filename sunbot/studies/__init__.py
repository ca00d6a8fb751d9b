"""The questions: the stages joined by a chain, asked by check, pick, season and survey."""
