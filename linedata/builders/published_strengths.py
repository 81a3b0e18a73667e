"""Published log gf of lines: core-changing ones that no one-electron model gives, and Li I 6708.

(air wavelength, E_low in eV, log gf); Fe III: Ekberg 1993 A&AS 101, 1 and Kurucz 2010;
Al II: NIST ASD (Kelleher & Podobedova 2008); Li I: Yan & Drake 1995, PRA 52, R4316.
"""

PUBLISHED = {
    ("Fe", 3): [
        (4395.755, 8.256, -2.595), (4419.596, 8.241, -2.218), (4431.019, 8.248, -2.572),
        (5073.903, 8.655, -2.557), (5086.701, 8.659, -2.590), (5127.387, 8.659, -2.218),
        (5156.111, 8.641, -2.018),
    ],
    ("Li", 1): [(6707.756, 0.0, -0.002), (6707.909, 0.0, -0.303)],
    ("Al", 2): [(4663.056, 10.598, -0.284)],
}
