"""All shapes by the user's word."""

from substrate.particle.cone import Cone
from substrate.particle.composite import Shell, Union
from substrate.particle.placement import Particle
from substrate.particle.primitives import Box, Disc, Ellipsoid, Rod, Sphere

SHAPES: dict[str, type[Particle]] = {
    "sphere": Sphere,
    "ellipsoid": Ellipsoid,
    "box": Box,
    "disc": Disc,
    "rod": Rod,
    "cone": Cone,
    "shell": Shell,
    "union": Union,
}

__all__ = ["SHAPES", "Box", "Cone", "Disc", "Ellipsoid", "Particle", "Rod", "Shell", "Sphere", "Union"]
