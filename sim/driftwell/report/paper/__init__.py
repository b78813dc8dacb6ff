"""What every picture is made with: paper, axes, colours, names, the folder it goes into."""
