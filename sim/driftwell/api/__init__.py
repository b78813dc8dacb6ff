"""driftwell from Python: scenarios built in code, run, read, asked and drawn."""
