"""What tools/bench.py measures, case by case."""
