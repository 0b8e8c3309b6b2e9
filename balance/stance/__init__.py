"""The machine on its two feet: contact line, mass, height, offset, inertia."""
