"""Studies read again from their folders, without the files they were made from."""
