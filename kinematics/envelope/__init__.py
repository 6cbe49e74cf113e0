"""What an arm can reach at all: the region, its boundary, its area and volume."""
