//! Everything that is not a stack file under test: the command, the physics against outside
//! sources, the sheet, and the rules of the house.

mod integration {
    mod designs;
    mod house_rules;
    mod physics;
}
