"""What the machine file says: parts, legs, feet, stabilisers, motors, supply, sensing, stances."""
