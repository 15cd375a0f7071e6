use rand::SeedableRng;

/// The generator behind every random choice; its sequence is fixed by its seed
/// on every platform.
pub type Stream = rand_xoshiro::Xoshiro256PlusPlus;

/// An independent random stream for one purpose: `seed` is the user's, `path`
/// says what the stream is for (pack number, bead number, …). Streams do not
/// depend on thread count or order of use.
pub fn stream(seed: u64, path: &[u64]) -> Stream {
    let state = path.iter().fold(mix(seed), |state, &step| mix(state ^ mix(step.wrapping_add(1))));
    Stream::seed_from_u64(state)
}

/// The finaliser of the splitmix64 generator (Steele, Lea & Flood 2014, OOPSLA,
/// "Fast splittable pseudorandom number generators").
fn mix(value: u64) -> u64 {
    let z = value.wrapping_add(0x9E37_79B9_7F4A_7C15);
    let z = (z ^ (z >> 30)).wrapping_mul(0xBF58_476D_1CE4_E5B9);
    let z = (z ^ (z >> 27)).wrapping_mul(0x94D0_49BB_1331_11EB);
    z ^ (z >> 31)
}
