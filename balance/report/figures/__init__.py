"""Drawings: facts and traces in, matplotlib figures out; the only place that knows matplotlib."""
