"""What stops charges, and what records their passing: walls and detectors."""
