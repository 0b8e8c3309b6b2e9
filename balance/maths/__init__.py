"""Pure array maths: rotations, inertia, legs, Riccati equations. It knows no record of the tool."""
