"""Physical constants that more than one model uses."""

SPEED_OF_LIGHT_M_S = 299_792_458.0  # exact, SI definition of the metre
BOLTZMANN_J_K = 1.380649e-23  # exact, SI definition of the kelvin
REFERENCE_TEMPERATURE_KELVIN = 290.0  # T0 of noise figures, Rec. ITU-R P.372, section 2
EARTH_RADIUS_KM = 6371.0  # mean radius, Rec. ITU-R P.1812, eq. (6) and P.310
RECEIVER_IMPEDANCE_OHM = 75.0  # feeders and sets for television, IEC 60728
HALF_WAVE_DIPOLE_GAIN_DBI = 2.15  # ERP is relative to this, EIRP to 0 dBi; ITU Radio Regulations 1.160-1.162
FLATTENED_KM = 0.05  # from the aerial: so near, a surface counts as bare ground; our choice
