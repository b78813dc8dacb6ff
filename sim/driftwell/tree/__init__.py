"""The tree: charges in cells, cells' expansions, and the walk over pairs of cells."""
