//! Chemical elements: symbols, the sublattice they sit on, standard atomic weights.

/// Which sublattice of a compound an element takes where it is mixed with others.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub enum Site {
    /// That of group III: boron, aluminium, gallium, indium; also of zinc and its like in II–VI
    /// compounds, and of caesium and the organic ions in perovskites.
    Three,
    /// That of group V: nitrogen, phosphorus, arsenic, antimony; also of chalcogens and halogens.
    Five,
    /// Silicon, germanium and the like share both sublattices.
    Four,
}

/// The sublattice of `element`, `None` for elements that no family mixes: lead and tin in
/// perovskites, copper and silver in chalcopyrites.
pub fn site(element: &str) -> Option<Site> {
    match element {
        "B" | "Al" | "Ga" | "In" | "Mg" | "Zn" | "Cd" | "Cs" | "Rb" | "FA" | "MA" => Some(Site::Three),
        "N" | "P" | "As" | "Sb" | "Bi" | "O" | "S" | "Se" | "Te" | "Cl" | "Br" | "I" => Some(Site::Five),
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
