"""What a source of charges emits from, and when: points, flat surfaces, electrodes, files."""
