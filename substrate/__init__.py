"""Light on small particles over flat layered samples.

The flow, from folder to folder, one way only:
    medium    where light travels: materials, the stack, plane waves in it
    particle  what scatters: shapes, and the cells that they fill
    green     how a dipole acts at a distance: in free space and through the stack
    source    what excites: plane waves, point emitters
    solve     the coupled-dipole system of all cells
    observe   what is seen: powers, collectors, near fields
    question  what was asked: answers with error bars
    run       from case file to results file
    picture   from results file to figures and report

Conventions, everywhere: time factor exp(-i omega t), index n + i k with k >= 0 for loss. Lengths in nm, vacuum wavelengths too;
angles in degrees. z points up, z = 0 is the top of the stack, the host is above; stacks are listed from the top down. A plane
wave from above travels along n k0 (sin t cos f, sin t sin f, -cos t) with s = (-sin f, cos f, 0) and p = k_hat x s; its amplitude is 1 in
the medium of incidence, and cross sections refer to its irradiance taken normal to its own direction. Directions of
observation: polar angle from +z (0..90 above, 90..180 below) and azimuth. Decay-rate factors are powers over that of the same
emitter in the unbounded host. Every number is a Quantity: value, error, unit, definition.
"""

__version__ = "0.1.0"

_PUBLIC = {
    "Film": "substrate.medium.stack",
    "Stack": "substrate.medium.stack",
    "material": "substrate.medium.material",
    "material_names": "substrate.medium.material",
    "Sphere": "substrate.particle.shape",
    "Ellipsoid": "substrate.particle.shape",
    "Box": "substrate.particle.shape",
    "Disc": "substrate.particle.shape",
    "Rod": "substrate.particle.shape",
    "Cone": "substrate.particle.shape",
    "Shell": "substrate.particle.shape",
    "Union": "substrate.particle.shape",
    "PlaneWave": "substrate.source.plane_wave",
    "Emitter": "substrate.source.emitter",
    "Collector": "substrate.observe.collector",
    "Quantity": "substrate.quantity",
    "scatter": "substrate.question.scatter",
    "emit": "substrate.question.emit",
    "reflectance": "substrate.question.plane_stack",
    "InputError": "substrate.errors",
    "NotConverged": "substrate.errors",
    "OutOfRange": "substrate.errors",
    "SubstrateError": "substrate.errors",
}
__all__ = ["__version__", *_PUBLIC]


def __getattr__(name: str):
    """Public names are imported when they are first used: `import substrate` alone costs milliseconds."""
    if name not in _PUBLIC:
        raise AttributeError(f"substrate has no {name!r}; it has {', '.join(sorted(_PUBLIC))}")
    from importlib import import_module

    value = getattr(import_module(_PUBLIC[name]), name)
    globals()[name] = value
    return value


def __dir__() -> list[str]:
    return sorted([*globals(), *_PUBLIC])
