"""Floor 3: a trap and voltages → unit potentials, wells, and the certificate of a ramp."""
