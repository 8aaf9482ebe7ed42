"""Files: designs, boxes and sweeps read with every fault at once, designs saved whole or not at all."""
