"""Demo schedules, made from invented data: their places, marks and numbers belong to no real work."""
