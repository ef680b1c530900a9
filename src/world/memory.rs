//! Files in memory, for tests and for standard input.
