"""Services: a design in, a frozen answer out; no text, no units, no clock, and any seed passed in."""
