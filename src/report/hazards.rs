//! Cautions that stand in every report.

/// Hazards of building and running such telescopes, and what to do about them.
pub const HAZARDS: [(&str, &str); 6] = [
    (
        "Sunlight",
        "A mirror of this size focuses sunlight: it sets fire to what stands in its focus and \
         blinds at once. Park every telescope facing away from the Sun's whole daily path, cover \
         mirrors during assembly and repair, keep people and anything that burns away from foci.",
    ),
    (
        "Wind and ice",
        "Large dishes are sails. Loads of storm, snow, ice and earthquake follow local codes; \
         parking and shut-down wind speeds belong to the structure's designer.",
    ),
    (
        "Lightning",
        "Telescopes are the tallest metal on open ground. Protection, earthing and surge arrest \
         follow local codes; clear the site when storms approach.",
    ),
    (
        "High altitude",
        "Work above about 2500 m brings altitude sickness, cold and slow help. Plan for \
         acclimatisation, oxygen, communication and evacuation.",
    ),
    (
        "Drives and high voltage",
        "Remote-controlled drives start without notice and cameras carry high voltage. Interlocks \
         and lock-out rules come before first light.",
    ),
    (
        "Structures, foundations, permits",
        "This report compares trigger rates. It is no design: foundations, structures, electrical \
         work and permits are for licensed engineers under local law.",
    ),
];
