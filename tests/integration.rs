//! Everything that is not a stack file under test: the command, the physics against outside
//! sources, the sheet, and the rules of the house.

#![expect(clippy::disallowed_methods, reason = "tests prepare and read their files themselves")]

mod integration {
    mod browser;
    mod carriers;
    mod circuit;
    mod cli;
    mod cli_materials;
    mod conditions;
    mod designs;
    mod docs;
    mod downward;
    mod formats;
    mod house_rules;
    mod materials;
    mod optics;
    mod optics_language;
    mod optics_limits;
    mod physics;
    mod physics_circuit;
    mod physics_grid;
    mod physics_language;
    mod physics_properties;
    mod robustness;
    mod rooms;
    mod schema;
    mod sheet;
    mod sheet_cases;
    mod sheet_page;
    mod slips;
    mod slips_planted;
    mod texture;
    mod tool;
    mod transport;
    mod transport_properties;
    mod watching;
}
