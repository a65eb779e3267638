"""THE coupled-dipole system: polarisability, interaction, iteration."""
