"""Timing circuits: the equations of each family, both ways, and the figures of the devices."""
