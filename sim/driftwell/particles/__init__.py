"""What moves: species, clouds, their shapes and motions, and the state of all particles."""
