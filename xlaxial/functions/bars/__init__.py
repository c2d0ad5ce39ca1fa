"""Schedules of bars: tables to a network, its solution, and the words that read results off it."""
