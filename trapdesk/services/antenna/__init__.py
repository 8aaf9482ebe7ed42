"""The figures of one design: its wire solved with its traps, stress, weather and findings."""
