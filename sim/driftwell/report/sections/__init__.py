"""What lies in a plane: outlines of electrodes and walls, and the potential between them."""
