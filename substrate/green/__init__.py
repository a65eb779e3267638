"""HOW a dipole acts at a distance: in free space, and through the stack."""
