//! What DEVELOPERS.md promises about the code, read from the code.
