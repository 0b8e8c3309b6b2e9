"""C sources of the designed law, the vectors that prove them, and what rounding costs."""
