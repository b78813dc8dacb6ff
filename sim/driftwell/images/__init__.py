"""The charges that electrodes answer to the charges between them: images."""
