//! Layout of the folder that a run leaves, and identity.
