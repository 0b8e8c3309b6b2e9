"""What the design file says: loop, law, trials, requirements."""
