//! Results to sheets.
