//! All integration tests in one binary. Each module says what belongs in it.
