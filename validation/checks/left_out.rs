//! What outside values there are that the table does not hold, and why.

/// [what, why] for the end of the table.
pub const LEFT_OUT: [[&str; 2]; 13] = [
    [
        "endless rod with a coil, open to all sides (OPENROD)",
        "an endless rod cannot be drawn, and a long one reaches a limit only like 1/length²; the rod R8 and the closed cell stand for it",
    ],
    [
        "coil or loop over a half space (HALFSPACE)",
        "a half space cannot be drawn, and a thick disc only tends to it; images agree with the published rows in validation/sphere.rs",
    ],
    [
        "slope of mutual inductance, force between coils, force on a sphere (dM/dz, SPHERE-FORCE)",
        "the program tells the force on a gap, not on a coil or part; the series and the quadrature agree with the published rows in their own tests",
    ],
    [
        "force of a uniform field, B²/2µ0 (GAPFORCE)",
        "it is the definition of the plain force beside each gap; no bounded core has a uniform field to compare with",
    ],
    [
        "spherical winding (SPHERICAL-WINDING)",
        "a section is a rectangle; a staircase of them tends to the sphere too slowly to judge anything",
    ],
    [
        "flat disc coils (SELF-disc)",
        "a winding has a height; the quadrature that the coils are judged by tends to the disc in its own test",
    ],
    [
        "spheroids (SPHEROID)",
        "inside polygons the exact ellipsoid is not drawn; spheres and cylinders test the same; the closed forms agree with Osborn's values in validation/demag.rs",
    ],
    [
        "demagnetising factor at vanishing susceptibility (CYL-CHI0)",
        "no field to compare: an identity with Nagaoka's coefficient, tested in validation/demag.rs",
    ],
    [
        "ring cores (RING)",
        "flux round the axis is not of this formulation; such a core is refused in words",
    ],
    [
        "effective parameters of the standard pot series (POT-SERIES)",
        "numbers from memory, unconfirmed, and without dimensions to compute ours from",
    ],
    [
        "turns per volt at a sine, 4.44 (FARADAY)",
        "belongs to the drive, which is not part of this table yet",
    ],
    [
        "losses in strands and cores (PROX, IGSE)",
        "belong to the losses, which are not part of this table yet",
    ],
    [
        "other rules of thumb for the leakage (mean turn, Rogowski's factor)",
        "presume an iron limb beside the windings and shorter windings than the window; the program does not use them",
    ],
];
