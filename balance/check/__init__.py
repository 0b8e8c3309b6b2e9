"""Verdicts: a number, its limit, passed or not, and why."""
