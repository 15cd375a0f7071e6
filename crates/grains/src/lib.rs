//! Gradings, random sphere packs and the motion of grains.
