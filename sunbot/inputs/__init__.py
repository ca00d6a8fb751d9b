"""What the user writes: a site file and a robot file in, frozen checked models out."""
