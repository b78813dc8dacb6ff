"""The player: a run's charges moving in space among its surfaces, in a page that needs no network."""
