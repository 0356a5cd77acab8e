"""Rate laws as pure functions: numbers in, numbers out. cgs units, temperatures in K.

Each function names its source. Nothing here knows of networks, cells or states.
"""

from math import exp, log, log10, pi, sqrt

# CODATA 2018, cgs
BOLTZMANN = 1.380649e-16
HBAR = 6.62607015e-27 / (2.0 * pi)
AMU = 1.66053906660e-24
ELECTRON_CHARGE = 1.602176634e-19 * 2.99792458e9  # esu
YEAR = 3.15576e7

STANDARD_DUST_AREA = 5.8575e-22  # cm^2 per H: 0.1 um, 3 g cm^-3, one hundredth of the mass
COLUMN_PER_MAG = 1.87e21  # N_H / A_V, Bohlin, Savage & Drake 1978


# ---- gas ----------------------------------------------------------------------------------

def evaluation_temperature(t, low, high, below):
    """Temperature at which a coefficient is taken; None where it is zero."""
    if t > high:
        return high
    if t < low:
        return {"extend": t, "hold": low, "zero": None}[below]
    return t


def power_law(t, a, slope, barrier):
    """a (T/300)^slope exp(-barrier/T)."""
    return a * (t / 300.0) ** slope * exp(-barrier / t)


def capture(t, langevin, x_300):
    """Su & Chesnavich 1982 J. Chem. Phys. 76 5183."""
    x = x_300 * sqrt(300.0 / t)
    if x >= 2.0:
        return langevin * (0.4767 * x + 0.62)
    return langevin * ((x + 0.509) ** 2 / 10.526 + 0.9754)


def falloff(pressure, high, log_centre):
    """Two-body coefficient between its limits, pressure = k0[M]/kinf (Troe); never above `high`."""
    if pressure <= 0.0:
        return 0.0
    width = 0.75 - 1.27 * log_centre
    broadening = 10.0 ** (log_centre / (1.0 + (log10(pressure) / width) ** 2))
    return min(high, high * pressure / (1.0 + pressure) * broadening)


def enthalpy(t, a, b):
    """H/R in K: the integral of Cp/R = a1/T^2 + a2/T + a3 + a4 T + ... (McBride, Zehe & Gordon 2002)."""
    return -a[0] / t + a[1] * log(t) + sum(c * t ** (i + 1) / (i + 1) for i, c in enumerate(a[2:])) + b[0]


def entropy(t, a, b):
    """S/R at 1 bar: the integral of Cp/(R T)."""
    return -a[0] / (2.0 * t**2) - a[1] / t + a[2] * log(t) + sum(c * t**i / i for i, c in enumerate(a[3:], 1)) + b[1]


def log_equilibrium(t, heat, order, gained):
    """ln of K_c in cm^-3 to the power `gained`; heat dH/R in K and order dS/R at 1 bar."""
    return order - heat / t + gained * log(1.0e6 / (BOLTZMANN * t))


# ---- light --------------------------------------------------------------------------------

def h2_shielding(column, doppler):
    """Draine & Bertoldi 1996 ApJ 468 269 eq. 37; doppler in cm/s."""
    x = column / 5.0e14
    root = sqrt(1.0 + x)
    return 0.965 / (1.0 + x / (doppler / 1.0e5)) ** 2 + 0.035 / root * exp(-8.5e-4 * root)


def doppler(t, turbulence):
    """Line width of H2, cm/s."""
    return sqrt(2.0 * BOLTZMANN * t / (2.016 * AMU) + turbulence**2)


def carbon_shielding(column_c, column_h2):
    """Kamp & Bertoldi 2000 A&A 353 276."""
    r = 2.8e-22 * column_h2
    return exp(-1.6e-17 * column_c) * exp(-r) / (1.0 + r)


def axis_position(axis, value):
    """Interval and fraction on an ascending axis, clamped at the ends."""
    value = min(max(value, axis[0]), axis[-1])
    i = 0
    while i < len(axis) - 2 and value > axis[i + 1]:
        i += 1
    return i, (value - axis[i]) / (axis[i + 1] - axis[i])


def log_column(column):
    return log10(column) if column > 1.0 else 0.0


def table_shielding(column, column_h2, log_columns, log_h2, factor):
    """Bilinear in the logarithm of the factor over the two logarithms of the columns."""
    i, u = axis_position(log_columns, log_column(column))
    j, v = axis_position(log_h2, log_column(column_h2))
    value = 0.0
    for jj, wj in ((j, 1.0 - v), (j + 1, v)):
        for ii, wi in ((i, 1.0 - u), (i + 1, u)):
            if wi * wj > 0.0:
                value += wi * wj * log10(factor[jj][ii])
    return 10.0**value


def dust_transmission(extinction, a_v, attenuated):
    """exp(-extinction A_V); 1 where the strength of the field is the one in the cell."""
    return 1.0 if attenuated else exp(-extinction * a_v)


# ---- energetic particles ------------------------------------------------------------------

def direct(value, zeta_cosmic, zeta_xray, zeta_nuclides):
    return value * (zeta_cosmic + zeta_xray + zeta_nuclides)


def secondary(value, zeta_cosmic, zeta_xray, dust_area):
    """UV photons of H2 excited by fast electrons; the dust competes for them."""
    return value * (zeta_cosmic + zeta_xray) * (STANDARD_DUST_AREA / dust_area)


# ---- dust ---------------------------------------------------------------------------------

def thermal_speed(t, weight):
    """Mean speed sqrt(8 k T/(pi m)), weight in amu."""
    return sqrt(8.0 * BOLTZMANN * t / (pi * weight * AMU))


def hydrogen_formation(t_gas, at_100, slope, dust_area):
    """R of dn(H2)/dt = R n_H n(H), cm^3 s^-1 (Jura 1975)."""
    return at_100 * (t_gas / 100.0) ** slope * (dust_area / STANDARD_DUST_AREA)


def coulomb_factor(z_grain, z_projectile, radius, t):
    """J of Draine & Sutin 1987 ApJ 320 803, image charge included."""
    tau = radius * BOLTZMANN * t / ELECTRON_CHARGE**2
    nu = z_grain / z_projectile
    if nu == 0:
        return 1.0 + sqrt(pi / (2.0 * tau))
    if nu < 0:
        return (1.0 - nu / tau) * (1.0 + sqrt(2.0 / (tau - 2.0 * nu)))
    theta = nu / (1.0 + nu**-0.5)
    return (1.0 + (4.0 * tau + 3.0 * nu) ** -0.5) ** 2 * exp(-theta / tau)


def charging(z_grain, z_projectile, weight, sticking, radius, t):
    """Collisional charging, cm^3 s^-1."""
    area = pi * radius**2
    return sticking * area * thermal_speed(t, weight) * coulomb_factor(z_grain, z_projectile, radius, t)


# ---- ices ---------------------------------------------------------------------------------

def hydrogen_sticking(t_gas, t_dust):
    """Hollenbach & McKee 1979 ApJS 41 555."""
    return 1.0 / (1.0 + 0.04 * sqrt(t_gas + t_dust) + 2.0e-3 * t_gas + 8.0e-6 * t_gas**2)


def accretion(t_gas, weight, sticking, dust_area, n_h):
    """s^-1."""
    return sticking * dust_area * n_h * thermal_speed(t_gas, weight)


def thermal_desorption(t_dust, energy, prefactor):
    return prefactor * exp(-energy / t_dust)


def cosmic_desorption(energy, prefactor, zeta_cosmic):
    """Hasegawa & Herbst 1993 MNRAS 261 83: grains at 70 K for the fraction 3.16e-19 of the time."""
    return 3.16e-19 * thermal_desorption(70.0, energy, prefactor) * zeta_cosmic / 1.3e-17


def cosmic_photon_flux(zeta_cosmic, zeta_xray, dust_area):
    """UV photons by energetic particles, cm^-2 s^-1."""
    return 1.4e20 * (zeta_cosmic + zeta_xray) * (STANDARD_DUST_AREA / dust_area)


def field_photon_flux(strength, a_v, attenuated):
    """UV photons of a field, cm^-2 s^-1."""
    return 1.0e8 * strength * dust_transmission(2.0, a_v, attenuated)


def photodesorption(flux, per_photon, site_density, lit_layers):
    """s^-1 per molecule in the lit layers: F Y pi a^2 n_d over the molecules there."""
    return flux * per_photon / (4.0 * site_density * lit_layers)


def sites(dust_area, site_density):
    """Sites per H: the surface is four times the cross-section."""
    return 4.0 * dust_area * site_density


# ---- surface ------------------------------------------------------------------------------

def oscillation_frequency(energy, weight, site_density):
    """sqrt(2 n_s k E/(pi^2 m)), s^-1 (Hasegawa, Herbst & Leung 1992)."""
    return sqrt(2.0 * site_density * BOLTZMANN * energy / (pi**2 * weight * AMU))


def hopping(t_dust, frequency, barrier):
    return frequency * exp(-barrier / t_dust)


def reduced_mass(a, b):
    return a * b / (a + b)


def tunnelling(width, weight, barrier):
    """Through a rectangular barrier: width in A, weight in amu, barrier in K."""
    return exp(-2.0 * (width * 1.0e-8 / HBAR) * sqrt(2.0 * weight * AMU * BOLTZMANN * barrier))


def over_or_through(t_dust, width, weight, barrier):
    return max(exp(-barrier / t_dust), tunnelling(width, weight, barrier))


def reaction_probability(attempts, leaving):
    """Reaction against diffusion and desorption (Garrod & Pauly 2011): rates in s^-1."""
    return attempts / (attempts + leaving)


def meeting(hop_a, hop_b, same, site_count):
    """Encounters of a pair per abundances, s^-1; a pair of one species counts half."""
    return (0.5 if same else 1.0) * (hop_a + hop_b) / site_count
