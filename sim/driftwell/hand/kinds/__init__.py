"""Hand calculations, one kind in one file; :mod:`driftwell.hand.table` lists them."""
