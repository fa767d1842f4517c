//! The generators against the known-answer vectors of their authors, and the golden values
//! that freeze stream version 1.

use crate::reference::{cases, words};
use driftwright_runtime::random::{
    Address, Generator, normal_pair, philox4x32_10, threefry2x64_20, uniform,
};
use driftwright_runtime::{Arith, Fused, STREAM_VERSION, Unfused, math, source_id};

/// J. K. Salmon and others, "Parallel random numbers: as easy as 1, 2, 3" (SC11, 2011), and
/// further vectors computed from the paper's round function.
#[test]
fn philox_known_answers() {
    let narrow = |texts: &[String]| words(texts).into_iter().map(|word| word as u32);
    let mut seen = 0;
    for case in cases().iter().filter(|case| case.variant == "philox4x32") {
        let counter: Vec<u32> = narrow(&case.counter_hex).collect();
        let key: Vec<u32> = narrow(&case.key_hex).collect();
        let out = philox4x32_10(
            key.try_into().expect("two words"),
            counter.try_into().expect("four words"),
        );
        assert!(narrow(&case.output_hex).eq(out), "{}", case.id);
        seen += 1;
    }
    assert!(seen >= 9);
}

/// The same paper's vectors for Threefry.
#[test]
fn threefry_known_answers() {
    let cases = cases();
    let case = cases.iter().find(|case| case.id == "A-threefry2x64-20-kat");
    let vectors = &case.expect("the case is in the file").vectors;
    assert_eq!(vectors.len(), 3);
    for vector in vectors {
        let [key, counter, out] = [&vector.key, &vector.counter, &vector.out].map(|t| words(t));
        let got = threefry2x64_20([key[0], key[1]], [counter[0], counter[1]]);
        assert_eq!(out, got);
    }
}

/// The rule from words to uniform numbers, and the quantile of the results, against a
/// computation with 40 digits.
#[test]
fn uniform_numbers() {
    let cases = cases();
    let case = cases.iter().find(|case| case.id == "A-stream-public");
    let case = case.expect("the case is in the file");
    let raw = words(&case.raw_hex);
    assert!(raw.len() >= 8);
    for (i, word) in raw.into_iter().enumerate() {
        assert_eq!(uniform(word), case.uniform53_centred[i]);
        let normal = math::normal_quantile::<Unfused>(uniform(word));
        let truth = case.normal_from_centred[i];
        assert!((normal / truth - 1.0).abs() < 4e-15, "{normal} {truth}");
    }
}

/// Stream version 1, frozen: a change here is a change of [`STREAM_VERSION`].
#[test]
fn golden_stream() {
    assert_eq!(STREAM_VERSION, 1);
    let address = Address {
        seed: 20_261_201,
        source: source_id("W"),
        block: 125,
        attempt: 0,
    };
    let retry = Address {
        attempt: 3,
        ..address
    };
    let threefry = Generator::Threefry2x64;
    let philox = Generator::Philox4x32;
    assert_eq!(source_id("W"), 0xd491_989f_2324_069a);
    let golden = [
        (
            threefry,
            address,
            [0x8818_9bd5_349a_2f34, 0x188c_490f_bfc4_e1cd],
            [0x3fed_a349_a2df_aa85, 0x3fe4_629e_2c73_bb82],
        ),
        (
            threefry,
            retry,
            [0xc870_39dc_2e0a_de2e, 0xd5fa_1a25_42be_a933],
            [0x3fd6_fe9d_d33d_d038, 0xbfe3_34ea_82b7_33f8],
        ),
        (
            philox,
            address,
            [0x4840_c2e6_f041_e7fb, 0xfc45_426a_5ffc_6d30],
            [0x3ff9_57d2_8adb_f765, 0xbfc2_9c31_fec1_708f],
        ),
    ];
    for (generator, address, words, normals) in golden {
        let path = (1 << 40) + 77;
        assert_eq!(generator.words(&address, path), words);
        for pair in [normal_pair::<Fused>(words), normal_pair::<Unfused>(words)] {
            assert_eq!(pair.map(f64::to_bits), normals);
        }
    }
    for (class, expected) in [
        (normal_bits::<Fused>(), 0x4907_ed41_d898_91fd),
        (normal_bits::<Unfused>(), 0x7e0d_6b38_43ae_b9d1),
    ] {
        assert_eq!(class, expected, "{class:#x}");
    }
}

/// The normals of twenty thousand paths, folded into one word by FNV-1a.
fn normal_bits<A: Arith>() -> u64 {
    let address = Address {
        seed: 9,
        source: source_id("B"),
        block: 2,
        attempt: 0,
    };
    let words = (0..20_000).map(|path| Generator::Threefry2x64.words(&address, path));
    let normals = words.flat_map(normal_pair::<A>);
    normals.fold(0xcbf2_9ce4_8422_2325, |hash: u64, z| {
        (hash ^ z.to_bits()).wrapping_mul(0x0000_0100_0000_01b3)
    })
}
