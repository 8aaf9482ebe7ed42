"""What lies between the feed point and the transmitter: line, transformer, tuner."""
