"""Many trials about one question."""
