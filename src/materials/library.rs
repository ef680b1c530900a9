//! The built-in library: one `.stack` file for each material and alloy, and the tables they name.
//!
//! The files are embedded as text and read only when a name is asked for.

/// Every material and alloy with the text that defines it: elements and compounds of the groups
/// III, IV and V, then alloys, then coats, glasses, contacts and metals.
pub const FILES: &[(&str, &str)] = &[
    ("GaAs", include_str!("library/GaAs.stack")),
    ("InP", include_str!("library/InP.stack")),
    ("Ge", include_str!("library/Ge.stack")),
    ("Si", include_str!("library/Si.stack")),
    ("GaP", include_str!("library/GaP.stack")),
    ("AlAs", include_str!("library/AlAs.stack")),
    ("InAs", include_str!("library/InAs.stack")),
    ("AlP", include_str!("library/AlP.stack")),
    ("GaSb", include_str!("library/GaSb.stack")),
    ("AlSb", include_str!("library/AlSb.stack")),
    ("InSb", include_str!("library/InSb.stack")),
    ("AlGaAs", include_str!("library/AlGaAs.stack")),
    ("GaInP", include_str!("library/GaInP.stack")),
    ("AlInP", include_str!("library/AlInP.stack")),
    ("AlGaInP", include_str!("library/AlGaInP.stack")),
    ("GaInAs", include_str!("library/GaInAs.stack")),
    ("AlInAs", include_str!("library/AlInAs.stack")),
    ("AlGaInAs", include_str!("library/AlGaInAs.stack")),
    ("GaAsP", include_str!("library/GaAsP.stack")),
    ("InGaAsP", include_str!("library/InGaAsP.stack")),
    ("InAsP", include_str!("library/InAsP.stack")),
    ("AlGaP", include_str!("library/AlGaP.stack")),
    ("AlAsP", include_str!("library/AlAsP.stack")),
    ("GaInSb", include_str!("library/GaInSb.stack")),
    ("AlGaSb", include_str!("library/AlGaSb.stack")),
    ("AlInSb", include_str!("library/AlInSb.stack")),
    ("GaAsSb", include_str!("library/GaAsSb.stack")),
    ("InAsSb", include_str!("library/InAsSb.stack")),
    ("AlAsSb", include_str!("library/AlAsSb.stack")),
    ("MgF2", include_str!("library/MgF2.stack")),
    ("ZnS", include_str!("library/ZnS.stack")),
    ("SiO2", include_str!("library/SiO2.stack")),
    ("TiO2", include_str!("library/TiO2.stack")),
    ("Al2O3", include_str!("library/Al2O3.stack")),
    ("Ta2O5", include_str!("library/Ta2O5.stack")),
    ("Si3N4", include_str!("library/Si3N4.stack")),
    ("HfO2", include_str!("library/HfO2.stack")),
    ("Nb2O5", include_str!("library/Nb2O5.stack")),
    ("glass", include_str!("library/glass.stack")),
    ("EVA", include_str!("library/EVA.stack")),
    ("ITO", include_str!("library/ITO.stack")),
    ("AZO", include_str!("library/AZO.stack")),
    ("Au", include_str!("library/Au.stack")),
    ("Ag", include_str!("library/Ag.stack")),
    ("Al", include_str!("library/Al.stack")),
    ("Cu", include_str!("library/Cu.stack")),
    ("Ti", include_str!("library/Ti.stack")),
    ("Ni", include_str!("library/Ni.stack")),
    ("Pd", include_str!("library/Pd.stack")),
    ("Pt", include_str!("library/Pt.stack")),
];

/// Every n,k table by the name a material gives it.
const TABLES: &[(&str, &str)] = &[
    ("AZO.csv", include_str!("library/tables/AZO.csv")),
    ("Ag.csv", include_str!("library/tables/Ag.csv")),
    ("Al.csv", include_str!("library/tables/Al.csv")),
    ("Al2O3.csv", include_str!("library/tables/Al2O3.csv")),
    ("AlAs.csv", include_str!("library/tables/AlAs.csv")),
    ("AlGaAs_099.csv", include_str!("library/tables/AlGaAs_099.csv")),
    ("AlGaAs_198.csv", include_str!("library/tables/AlGaAs_198.csv")),
    ("AlGaAs_315.csv", include_str!("library/tables/AlGaAs_315.csv")),
    ("AlGaAs_419.csv", include_str!("library/tables/AlGaAs_419.csv")),
    ("AlGaAs_491.csv", include_str!("library/tables/AlGaAs_491.csv")),
    ("AlGaAs_590.csv", include_str!("library/tables/AlGaAs_590.csv")),
    ("AlGaAs_700.csv", include_str!("library/tables/AlGaAs_700.csv")),
    ("AlGaAs_804.csv", include_str!("library/tables/AlGaAs_804.csv")),
    ("Au.csv", include_str!("library/tables/Au.csv")),
    ("Cu.csv", include_str!("library/tables/Cu.csv")),
    ("EVA.csv", include_str!("library/tables/EVA.csv")),
    ("GaAs.csv", include_str!("library/tables/GaAs.csv")),
    ("GaInP.csv", include_str!("library/tables/GaInP.csv")),
    ("GaP.csv", include_str!("library/tables/GaP.csv")),
    ("GaSb.csv", include_str!("library/tables/GaSb.csv")),
    ("Ge.csv", include_str!("library/tables/Ge.csv")),
    ("HfO2.csv", include_str!("library/tables/HfO2.csv")),
    ("ITO.csv", include_str!("library/tables/ITO.csv")),
    ("InAs.csv", include_str!("library/tables/InAs.csv")),
    ("InP.csv", include_str!("library/tables/InP.csv")),
    ("Nb2O5.csv", include_str!("library/tables/Nb2O5.csv")),
    ("Ni.csv", include_str!("library/tables/Ni.csv")),
    ("Pd.csv", include_str!("library/tables/Pd.csv")),
    ("Pt.csv", include_str!("library/tables/Pt.csv")),
    ("Si.csv", include_str!("library/tables/Si.csv")),
    ("Ta2O5.csv", include_str!("library/tables/Ta2O5.csv")),
    ("Ti.csv", include_str!("library/tables/Ti.csv")),
    ("TiO2.csv", include_str!("library/tables/TiO2.csv")),
    ("ZnS.csv", include_str!("library/tables/ZnS.csv")),
    ("glass.csv", include_str!("library/tables/glass.csv")),
];

/// The table of that name: `nm,n,k` lines.
pub fn table(name: &str) -> Option<&'static str> {
    TABLES.iter().find(|(known, _)| *known == name).map(|(_, text)| *text)
}

/// The names of all tables.
pub fn table_names() -> impl Iterator<Item = &'static str> {
    TABLES.iter().map(|(name, _)| *name)
}
