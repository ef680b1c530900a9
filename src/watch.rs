//! Build, then again at every save.
