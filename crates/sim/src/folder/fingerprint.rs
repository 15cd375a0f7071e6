use crate::Scene;

/// A number that tells results of different scenes (or versions of the program) apart.
pub(crate) fn fingerprint<'a>(scenes: impl Iterator<Item = &'a Scene>) -> String {
    let mut text = String::new();
    for scene in scenes {
        text.push_str(&scene.to_toml());
        text.push_str(&scene.spheres_csv().unwrap_or_default());
    }
    format!("{:016x}", checksum(text.as_bytes()))
}

/// The 64-bit FNV-1a hash (Fowler, Noll & Vo 1991, from memory): good against
/// torn and altered lines, not against malice.
pub(crate) fn checksum(bytes: &[u8]) -> u64 {
    bytes
        .iter()
        .fold(0xcbf2_9ce4_8422_2325, |hash, &byte| (hash ^ u64::from(byte)).wrapping_mul(0x0100_0000_01b3))
}

#[cfg(test)]
mod tests {
    #[test]
    fn the_hash_agrees_with_published_values() {
        // Test vectors of the algorithm's authors for "" and "a".
        assert_eq!(super::checksum(b""), 0xcbf29ce484222325);
        assert_eq!(super::checksum(b"a"), 0xaf63dc4c8601ec8c);
    }
}
