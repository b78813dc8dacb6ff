"""The commands on one run: foretold, carried out, watched."""
