"""Search: which dyes and how much of each tell the steps apart best."""
