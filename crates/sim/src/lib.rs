//! Scenes, coupled swelling marches, studies and run folders.
