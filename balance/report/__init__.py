"""The answer on paper: facts first, figures from them, one self-contained page last."""
