"""Published log gf of lines: core-changing ones that no one-electron model gives, and Li I 6708.

(air wavelength, E_low in eV, log gf), from memory; Fe III: Ekberg 1993 A&AS 101, 1 and Kurucz 2010;
Al II, Si II: NIST ASD (Kelleher & Podobedova 2008); Li I: Yan & Drake 1995, PRA 52, R4316.
"""

# Bibliographic key of the log gf of an ion; others: NIST_ASD.
SOURCES = {("Fe", 3): "Ekberg1993", ("Li", 1): "YanDrake1995"}
# Forbidden lines seen in absorption in stars: gf = 1.4992e-16 g A lambda^2, A (s-1) of Wiese,
# Fuhr & Deters 1996: (air wavelength, E_low in eV, 2J+1 above, A).
FORBIDDEN = {
    ("O", 1): [
        (6300.304, 0.0, 5, 5.65e-3), (6363.776, 0.020, 5, 1.82e-3), (5577.339, 1.967, 1, 1.26),
    ],
    ("C", 1): [(8727.13, 1.264, 1, 0.599)],
}
# C III 2p 3p 3D - 2s 5f 3F: NIST ASD to 0.2 dex, shares of LS coupling.
PUBLISHED = {
    ("C", 3): [
        (4152.514, 40.0564, -0.13), (4156.504, 40.0595, 0.04), (4162.877, 40.0643, 0.22),
    ],
    ("Fe", 3): [
        (4395.755, 8.256, -2.595), (4419.596, 8.241, -2.218), (4431.019, 8.248, -2.572),
        (5073.903, 8.655, -2.557), (5086.701, 8.659, -2.590), (5127.387, 8.659, -2.218),
        (5156.111, 8.641, -2.018),
    ],
    ("Li", 1): [(6707.756, 0.0, -0.002), (6707.909, 0.0, -0.303)],
    ("Si", 2): [
        (3853.665, 6.857, -1.341), (3856.018, 6.859, -0.406), (3862.595, 6.857, -0.757),
        (4128.054, 9.837, 0.359), (4130.894, 9.839, 0.552), (5041.024, 10.066, 0.029),
        (5055.984, 10.074, 0.523),
    ],
    ("Al", 2): [(4663.056, 10.598, -0.284)],
}
