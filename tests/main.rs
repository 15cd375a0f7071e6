//! What a user is promised.
