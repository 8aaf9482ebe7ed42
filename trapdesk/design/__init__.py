"""What a person sets: every part of a design declared once, and the rules that hold it together."""
