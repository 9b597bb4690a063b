"""Every allowed error, each with its reason. Loosening one is a change to be argued."""

#: A bracket around an edge, relative to its value: the contract of the record.
BRACKET_WIDTH = 1e-15

#: ω of a crossing, the knob at a landmark and the place of a landmark, relative. All come from exact isolation, so f64 rounding of
#: the last step (some 1e-15) is all that is lost; 1e-9 leaves room for an ill-conditioned last step and still proves nine digits.
OMEGA = 1e-9
LANDMARK_KNOB = 1e-9
LANDMARK_PLACE = 1e-9

#: Degrees. An angle is a sum of up to 40 arguments of differences of poles and zeros, good to some 1e-13 where these are apart.
ANGLE = 1e-9
#: Where they are close, ANGLE_ROUNDINGS times what the angle turns if each of them moves by EPSILON of its modulus.
ANGLE_ROUNDINGS = 16

#: Centroid, relative to the largest pole or zero: a sum of 40 figures of f64.
CENTROID = 1e-12

#: Radius of a simple pole or zero, relative to its modulus.
RADIUS_SIMPLE = 1e-12
#: Radius of an m-fold one: it is isolated exactly, so it is as good as a simple one.
RADIUS_MULTIPLE = 1e-12

#: A vertex of a branch is a pole: its distance to the nearest one, relative to the larger of its modulus and the view. Where poles
#: meet, the rounding of the knob alone moves an m-fold pole by EPSILON^(1/m), so a vertex that is exactly a pole at a knob within
#: VERTEX_KNOB of the stated one is good too.
VERTEX_PLACE = 1e-9
VERTEX_KNOB = 1e-13

#: A branch has a root of its own if one is this near to it, relative as above; which root it is matters here, not where exactly.
OWN_ROOT = 1e-7
#: Two roots nearer to each other than this part of their modulus: which of them an f64 vertex belongs to is not judged.
TOO_NEAR = 1e-8

#: Pixels between the true locus and the polyline, in a picture of PICTURE pixels each way.
SAGITTA = 0.25
PICTURE = 1000

#: Distance from an edge at which the counts are sampled, relative to the edge.
NEAR_EDGE = "1e-6"

#: An edge that is a quotient of numbers up to this must be given exactly: someone checks it by hand.
SHORT_NUMBER = 10**9
