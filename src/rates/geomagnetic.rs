//! The Earth's field as a gate for charged primaries.

/// Least rigidity, GV, of a charged primary that arrives from overhead:
/// R = 14.9 cos^4(geomagnetic latitude).
///
/// # Validity
/// Vertical arrival in a dipole. The field is not one: with the latitude taken from the local
/// inclination, tan(latitude) = tan(I) / 2, it gives 11.4 GV for 37.2 deg (La Palma; tables say 11 to
/// 12, from memory) but 3.5 GV for 64.1 deg (Namibia; tables 8 to 9), and with the latitude in the
/// centred dipole the other way round. Use the larger of the two as a warning only. Trigger rates of
/// protons do not depend on it; electrons below some 20 GeV do.
///
/// # Source
/// Stoermer 1955, The Polar Aurora; the constant from memory.
pub fn vertical_cutoff_gv(geomagnetic_latitude_rad: f64) -> f64 {
    14.9 * geomagnetic_latitude_rad.cos().powi(4)
}

/// Latitude in a dipole from the inclination of the field: tan(latitude) = tan(inclination) / 2.
pub fn dipole_latitude_rad(inclination_rad: f64) -> f64 {
    (0.5 * inclination_rad.tan()).atan()
}
