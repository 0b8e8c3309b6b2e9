"""Words typed at a shell.

Only here is anything printed, and only here (and in `page`) are imports made late.
"""
