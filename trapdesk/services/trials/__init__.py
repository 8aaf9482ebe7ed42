"""Ten thousand antennas as they might be built and hung: will they cover the bands, and what helps."""
