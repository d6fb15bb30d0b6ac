"""Signal to temperature and back: Planck's law in a band, the air path, the measurement equation, emissivities."""
