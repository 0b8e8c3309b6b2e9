"""The dynamic model of one stance: linear records, the kernel's arrays, what no controller can beat."""
