//! The library: stack files and index tables, embedded.
