"""Fields that a file gives on a grid, as kinds of a scenario."""
