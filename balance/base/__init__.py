"""What every room needs: errors with their place, units, plain tables."""
