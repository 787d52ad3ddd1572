"""What the user writes: the machine file and the site file, as frozen values."""
