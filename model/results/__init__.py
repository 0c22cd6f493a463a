"""What a solved frame tells: twist and bending stiffness, energy, what a change would buy."""
