"""The invented sky of Corrie Observatory: every star, nebula and instrument setting.

Nothing here is measured. Names, velocities, columns and exposure levels are made up; the
temperatures, pressures and line widths are what such objects commonly have.
"""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True)
class Star:
    """One photosphere.

    temperature K; log_pe log10 dyn cm-2; metallicity dex; velocity km/s in the spectrum's
    frame; vsini km/s; turbulence km/s (micro); light: share of the continuum
    anchor: (species, air Angstrom, equivalent width in milliangstrom) fixes the opacity scale
    core: depth of an opaque line; gamma: damping, rad/s
    wing: Angstrom from the centre of H beta where its Stark wing has optical depth one
    """

    temperature: float
    log_pe: float
    velocity: float
    anchor: tuple[str, float, float]
    metallicity: float = 0.0
    vsini: float = 3.0
    turbulence: float = 1.3
    light: float = 1.0
    core: float = 0.9
    gamma: float = 1.0e9
    wing: float = 0.9


@dataclass(frozen=True)
class Cloud:
    """Interstellar cloud: km/s in the spectrum's frame, b in km/s, log10 columns (cm-2)."""

    velocity: float
    b: float
    columns: tuple[tuple[str, float], ...]


@dataclass(frozen=True)
class Air:
    """Air over the telescope: velocity of its lines in the spectrum's frame, air mass, water."""

    velocity: float
    air_mass: float = 1.2
    water: float = 0.5


@dataclass(frozen=True)
class Camera:
    """Spectrograph and exposure.

    ranges: own-medium Angstrom of each detector; resolution; step: Angstrom (or, with
    ``log_step``, ln lambda) a pixel; electrons: a pixel at the blaze peak; read_noise:
    electrons; order_constant: order number times wavelength, Angstrom, 0 without echelle
    keep_blaze: flux left as recorded; cosmic_rays: how many
    """

    ranges: tuple[tuple[float, float], ...]
    resolution: float
    step: float
    electrons: float
    read_noise: float = 6.0
    log_step: bool = False
    order_constant: float = 565000.0
    keep_blaze: bool = False
    cosmic_rays: int = 0


@dataclass(frozen=True)
class Scene:
    """One sample spectrum; ``layout`` names its writer in ``files``."""

    name: str
    file: str
    title: str
    description: str
    seed: int
    medium: str
    frame: str
    layout: str
    camera: Camera
    stars: tuple[Star, ...] = ()
    air: Air | None = None
    clouds: tuple[Cloud, ...] = ()
    nebula: bool = False
    read_options: tuple[tuple[str, str], ...] = ()


G_DWARF = Scene(
    "g_dwarf", "g_dwarf.fits", "CRI 0417, a solar-type dwarf",
    "Solar-type star, normalised, barycentric; telluric lines stand at the Earth's velocity.",
    417, "air", "barycentric", "image",
    Camera(((4800.0, 5411.0), (5424.0, 6083.0), (6097.0, 6800.0)), 48000.0, 0.045, 32000.0),
    (Star(5800.0, 1.25, 37.6, ("Fe I", 6173.334, 68.0)),),
    Air(11.8, 1.15, 0.6),
)

COOL_GIANT = Scene(
    "cool_giant", "cool_giant.fits", "CRI 1180, a cool giant",
    "Crowded spectrum on two detectors, in electrons, with cosmic rays; vacuum wavelengths.",
    1180, "vacuum", "topocentric", "detectors",
    Camera(((5300.0, 5920.0), (6060.0, 6750.0)), 60000.0, 1.0 / 60000.0 / 2.6, 24000.0,
           log_step=True, keep_blaze=True, cosmic_rays=45, order_constant=0.0),
    (Star(4200.0, -1.0, -81.3, ("Fe I", 6173.334, 125.0), turbulence=1.7, gamma=2.5e8,
          vsini=4.0, core=0.93, wing=0.3),),
    Air(0.0, 1.4, 0.9),
)

A_STAR = Scene(
    "a_star", "a_star.txt.gz", "CRI 0092, an A star behind two clouds",
    "Rotating A star; sharp Na D, Ca II, CH and CH+ lines of two interstellar clouds.",
    92, "air", "heliocentric", "text",
    Camera(((3800.0, 5105.0), (5118.0, 6800.0)), 30000.0, 1.0 / 30000.0 / 2.5, 50000.0,
           log_step=True),
    (Star(9200.0, 2.55, 41.3, ("Mg II", 4481.2, 270.0), vsini=25.0, turbulence=2.2,
          core=0.85, gamma=3.0e8, wing=7.0),),
    Air(-22.4, 1.05, 0.35),
    (Cloud(-27.9, 1.8, (("Na I", 12.15), ("Ca II", 12.2), ("CH", 12.9), ("CH+", 12.8),
                        ("K I", 10.9), ("Ca I", 10.2))),
     Cloud(9.6, 2.6, (("Na I", 11.55), ("Ca II", 12.05)))),
)

DOUBLE_LINED = Scene(
    "double_lined", "double_lined.fits", "CRI 2051, a double-lined binary",
    "Two solar-type stars 60 km/s apart, the fainter with a third of the light.",
    2051, "air", "barycentric", "image",
    Camera(((5000.0, 5770.0), (5786.0, 6600.0)), 40000.0, 0.055, 14000.0),
    (Star(6100.0, 1.35, -31.2, ("Fe I", 6173.334, 58.0), vsini=5.0, light=2.0 / 3.0),
     Star(5600.0, 1.15, 28.8, ("Fe I", 6173.334, 76.0), vsini=4.0, light=1.0 / 3.0)),
    Air(-6.3, 1.3, 0.5),
)

NEBULA = Scene(
    "nebula", "nebula.ecsv", "Corrie 7, an emission nebula",
    "Emission lines over a weak continuum; night-sky lines subtracted imperfectly.",
    7, "air", "topocentric", "ecsv",
    Camera(((3700.0, 9300.0),), 4000.0, 1.0 / 4000.0 / 2.5, 60000.0, 5.0, True, 0.0),
    air=Air(0.0), nebula=True,
)

HOT_STAR = Scene(
    "hot_star", "hot_star.fits", "CRI 3306, a B star",
    "He I, Si III, O II and N II lines of a slowly rotating hot star; logarithmic steps.",
    3306, "air", "heliocentric", "log_image",
    Camera(((3850.0, 4980.0),), 25000.0, 1.0 / 25000.0 / 2.6, 60000.0, log_step=True),
    (Star(20000.0, 3.1, 18.9, ("He I", 4387.93, 560.0), vsini=15.0, turbulence=4.0,
          core=0.7, gamma=4.0e9, wing=3.0),),
)

METAL_POOR = Scene(
    "metal_poor", "metal_poor.fits", "CRI 0733, a metal-poor giant",
    "Nineteen echelle orders that overlap, the blaze left in; iron a hundredth of the Sun's.",
    733, "vacuum", "barycentric", "orders",
    Camera(((4560.0, 5440.0),), 45000.0, 1.0 / 45000.0 / 2.5, 12000.0, log_step=True,
           keep_blaze=True),
    (Star(4800.0, -0.6, 163.4, ("Fe I", 4957.6, 150.0), metallicity=-2.0, turbulence=1.6,
          gamma=2.5e8, wing=0.5),),
)

SCENES = (G_DWARF, COOL_GIANT, A_STAR, DOUBLE_LINED, NEBULA, HOT_STAR, METAL_POOR)
