"""What a run recorded, in open formats that other programs read."""
