"""Motion in time: the compiled loop, its splittings, the schedule of steps, the choice of step."""
