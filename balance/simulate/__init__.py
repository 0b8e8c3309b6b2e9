"""Trials run on one stance: what happened, no verdict on requirements."""
