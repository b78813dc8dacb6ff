"""What else acts on charges: gas, drag, lasers, ... each process in a file of its own."""
