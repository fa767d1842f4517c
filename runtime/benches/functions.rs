//! Cost of one evaluation of each vectorised function: `cargo bench -p driftwright-runtime`.

use divan::Bencher;
use divan::counter::ItemsCount;
use driftwright_runtime::collect::Paths;
use driftwright_runtime::random::Draws;
use driftwright_runtime::{
    Arith, Grid, LANES, Lane, Run, Shape, Simulator, StepError, math, simulate,
};

const PATHS: u64 = 256;
const STEPS: usize = 1_000;

fn main() {
    divan::main();
}

/// A simulator without noise whose step maps `x` to `a + b f(x)`.
macro_rules! functions {
    ($($name:ident: |$x:ident| $f:expr, from $start:literal, $a:literal + $b:literal;)*) => { $(
        #[divan::bench]
        fn $name(bencher: Bencher<'_, '_>) {
            struct Iterated;

            impl Simulator for Iterated {
                fn shape(&self) -> Shape<'_> {
                    Shape {
                        states: 1,
                        step_values: 2,
                        step_scratch: 0,
                        sources: &[],
                        outputs: &[],
                        observation_values: 0,
                        observation_scratch: 0,
                        left_domain: None,
                        time_dependent: false,
                        approximate: true,
                    }
                }

                fn start(&self, states: &mut [f64]) {
                    states[0] = $start;
                }

                fn step_values(&self, _: f64, _: f64, values: &mut [f64]) -> Result<(), StepError> {
                    values.copy_from_slice(&[$a, $b]);
                    Ok(())
                }

                fn observation_values(&self, _: f64, _: &mut [f64]) -> Result<(), StepError> {
                    Ok(())
                }

                #[inline(always)]
                fn step<A: Arith>(
                    &self,
                    v: &[f64],
                    states: &mut [Lane],
                    _: &[Lane],
                    _: &Draws,
                    _: &mut [Lane],
                ) {
                    let [a, b] = v else { unreachable!("two values") };
                    for i in 0..LANES {
                        let $x = states[0][i];
                        states[0][i] = a + b * $f;
                    }
                }

                #[inline(always)]
                fn observe<A: Arith>(&self, _: &[f64], _: &[Lane], _: &mut [Lane], _: &mut [Lane]) {}
            }

            let grid = Grid::new(&[1.0], Some(STEPS)).expect("a grid");
            let run = Run { paths: PATHS, threads: 1, ..Run::default() };
            bencher
                .counter(ItemsCount::new(PATHS * STEPS as u64))
                .bench(|| simulate(&Iterated, &grid, &run, Paths).expect("a run"));
        }
    )* };
}

functions! {
    nothing: |x| x, from 0.5, 0.1 + 0.9;
    sqrt: |x| math::sqrt::<A>(x), from 0.5, 0.1 + 0.9;
    exp: |x| math::exp::<A>(x), from 0.5, 0.1 + 0.1;
    expm1: |x| math::expm1::<A>(x), from 0.5, 0.1 + 0.1;
    ln: |x| math::ln::<A>(x), from 2.5, 2.0 + 0.5;
    pow: |x| math::pow::<A>(x, 1.3), from 0.5, 0.1 + 0.5;
    sin: |x| math::sin::<A>(x), from 0.5, 0.1 + 0.9;
    cos: |x| math::cos::<A>(x), from 0.5, 0.1 + 0.9;
    tanh: |x| math::tanh::<A>(x), from 0.5, 0.1 + 0.9;
    sinh: |x| math::sinh::<A>(x), from 0.5, 0.1 + 0.5;
    normal_pdf: |x| math::normal_pdf::<A>(x), from 0.5, 0.1 + 0.9;
    normal_cdf: |x| math::normal_cdf::<A>(x), from 0.5, 0.1 + 0.9;
    atan: |x| math::atan::<A>(x), from 0.5, 0.1 + 0.9;
}
