//! Files on disk.
