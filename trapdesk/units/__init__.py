"""What a person types and reads: numbers with units, prints on parts, readings."""
