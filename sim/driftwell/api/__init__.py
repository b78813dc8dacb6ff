"""driftwell from Python: scenarios built in code, runs carried out, read, asked and drawn.

What is meant for users stands in :mod:`driftwell` itself, which loads it when it is asked for.
"""
