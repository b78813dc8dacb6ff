"""The kinds of questions: one file for each kind, or for a few that share their arithmetic."""
