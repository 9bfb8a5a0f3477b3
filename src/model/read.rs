//! Reading a model from its files.
