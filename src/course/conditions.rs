//! The names of conditions, which a study may accept.

/// Every condition that a claim can rest on, with its meaning for the reader.
pub const CONDITIONS: [(&str, &str); 11] = [
    ("finite mass", "the target's density has a finite integral"),
    (
        "invariant",
        "one step of the kernel leaves the target's law as it is",
    ),
    (
        "irreducible",
        "every set that the target gives weight to can be reached",
    ),
    (
        "recurrent",
        "and is reached from every start, or the start lies in a named closed class",
    ),
    ("integrable", "the quantity has an expectation"),
    (
        "aperiodic",
        "the chain does not go round in a cycle of sets",
    ),
    (
        "geometrically ergodic",
        "the start is forgotten at a geometric rate",
    ),
    (
        "moment above two",
        "the quantity has a moment of an order above two",
    ),
    ("reversible", "the chain looks the same backwards in time"),
    ("second moment", "the quantity has a variance"),
    (
        "start forgotten",
        "the chains no longer show where they began",
    ),
];
