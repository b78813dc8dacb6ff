"""What a run leaves behind: one folder, write-once HDF5 segments, one master file over them."""
