"""Studies: many runs for one purpose, and the engines that carry them out."""
