"""The player: charges moving in space among their surfaces, in a page that needs no network."""
