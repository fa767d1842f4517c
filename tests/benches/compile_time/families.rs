//! What grows.

use crate::large;

/// Models of one kind and of any size.
pub(crate) struct Family {
    pub(crate) name: &'static str,
    /// What the sizes count.
    pub(crate) unit: &'static str,
    pub(crate) sizes: &'static [usize],
    /// The texts of the model files.
    pub(crate) models: fn(usize) -> Vec<String>,
}

pub(crate) fn all() -> [Family; 7] {
    [
        Family {
            name: "correlated states",
            unit: "states, each correlated with all others and with a derived quantity",
            sizes: &[20, 40, 80, 160, 300],
            models: |n| vec![large::correlated(n)],
        },
        Family {
            name: "long sum",
            unit: "terms over different denominators in one drift",
            sizes: &[1_250, 2_500, 5_000, 10_000, 20_000],
            models: |n| vec![large::long_drift(n)],
        },
        Family {
            name: "nested functions",
            unit: "derived quantities D = sin(D) + X of the one before",
            sizes: &[25, 50, 100, 200, 400],
            models: |n| vec![large::chain(n, "sin(D) + X")],
        },
        Family {
            name: "nested products",
            unit: "derived quantities D = sin(D)*D of the one before",
            sizes: &[8, 15, 30, 60],
            models: |n| vec![large::chain(n, "sin(D)*D")],
        },
        Family {
            name: "coupled states",
            unit: "states, each following the one before",
            sizes: &[25, 50, 100, 200],
            models: |n| vec![large::cascade(n)],
        },
        Family {
            name: "power of a sum",
            unit: "the exponent",
            sizes: &[25, 50, 100, 200, 400],
            models: |n| vec![large::power_of_sum(n)],
        },
        Family {
            name: "many models",
            unit: "models in one call",
            sizes: &[125, 250, 500, 1_000, 2_000],
            models: |n| (0..n).map(large::small).collect(),
        },
    ]
}
