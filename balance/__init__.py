"""Balance assist for legged machines that stand on two point feet: from a machine file to a verdict.

The words to call are in `balance.api` (one module per verb); nothing is imported here, so that asking for help or
making a typing error in a file costs no time.
"""

__version__ = "0.1.0"
