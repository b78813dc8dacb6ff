"""What commands take on their lines: kinds of values, and options that several share."""
