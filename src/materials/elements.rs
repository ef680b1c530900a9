//! Chemical elements: symbols, the sublattice they sit on, standard atomic weights.

/// Which sublattice of a zinc-blende compound an element takes.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub enum Site {
    /// Group III: boron, aluminium, gallium, indium.
    Three,
    /// Group V: nitrogen, phosphorus, arsenic, antimony.
    Five,
    /// Silicon, germanium and the like share both sublattices.
    Four,
}

/// The sublattice of `element` in a III–V or IV compound, `None` where it has none.
pub fn site(element: &str) -> Option<Site> {
    match element {
        "B" | "Al" | "Ga" | "In" => Some(Site::Three),
        "N" | "P" | "As" | "Sb" | "Bi" => Some(Site::Five),
        "C" | "Si" | "Ge" | "Sn" => Some(Site::Four),
        _ => None,
    }
}

/// Standard atomic weight (abridged values, IUPAC 2021; Prohaska et al., Pure Appl. Chem. 94,
/// 573 (2022)) of the elements the density of a crystal is computed from.
pub fn atomic_weight(element: &str) -> Option<f64> {
    Some(match element {
        "Al" => 26.982,
        "Ga" => 69.723,
        "In" => 114.82,
        "P" => 30.974,
        "As" => 74.922,
        "Sb" => 121.76,
        "Si" => 28.085,
        "Ge" => 72.630,
        _ => return None,
    })
}

/// Whether `symbol` is a chemical element, or one of the organic ions that formulas treat alike.
pub fn is_known(symbol: &str) -> bool {
    SYMBOLS.contains(&symbol)
}

const SYMBOLS: &[&str] = &[
    "H", "He", "Li", "Be", "B", "C", "N", "O", "F", "Ne", "Na", "Mg", "Al", "Si", "P", "S", "Cl", "Ar", "K",
    "Ca", "Sc", "Ti", "V", "Cr", "Mn", "Fe", "Co", "Ni", "Cu", "Zn", "Ga", "Ge", "As", "Se", "Br", "Kr",
    "Rb", "Sr", "Y", "Zr", "Nb", "Mo", "Ru", "Rh", "Pd", "Ag", "Cd", "In", "Sn", "Sb", "Te", "I", "Xe", "Cs",
    "Ba", "La", "Ce", "Pr", "Nd", "Sm", "Eu", "Gd", "Tb", "Dy", "Ho", "Er", "Tm", "Yb", "Lu", "Hf", "Ta",
    "W", "Re", "Os", "Ir", "Pt", "Au", "Hg", "Tl", "Pb", "Bi", "Th", "U", "FA", "MA",
];
