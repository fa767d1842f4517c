//! The choice of instruction set, and the only unsafe code of the project.
//!
//! A [`Task`] is compiled once for each instruction set and arithmetic class; all that it
//! calls is `#[inline(always)]`, so the whole of it is. A [`Target`] can only be made for an
//! instruction set that this processor has been seen to have, which is what makes the
//! calls below sound.

#![allow(unsafe_code)] // calls of functions compiled for more than the baseline

use crate::arith::{Arith, ArithmeticClass, Fused, Unfused};

/// The instruction sets the runtime is compiled for. The bits of a path do not depend on it.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub enum InstructionSet {
    /// What the crate is compiled for in any case.
    Baseline,
    /// AVX2 with fused multiply-add: four lanes at once.
    Avx2,
    /// AVX-512 (foundation, doubleword and quadword, vector length): eight lanes at once.
    Avx512,
}

impl InstructionSet {
    /// The widest set this processor has.
    #[must_use]
    pub fn best() -> InstructionSet {
        [InstructionSet::Avx512, InstructionSet::Avx2]
            .into_iter()
            .find(|set| set.is_available())
            .unwrap_or(InstructionSet::Baseline)
    }

    /// Whether this processor has the set.
    #[must_use]
    pub fn is_available(self) -> bool {
        match self {
            InstructionSet::Baseline => true,
            #[cfg(target_arch = "x86_64")]
            InstructionSet::Avx2 => {
                is_x86_feature_detected!("avx2") && is_x86_feature_detected!("fma")
            }
            #[cfg(target_arch = "x86_64")]
            InstructionSet::Avx512 => {
                InstructionSet::Avx2.is_available()
                    && is_x86_feature_detected!("avx512f")
                    && is_x86_feature_detected!("avx512dq")
                    && is_x86_feature_detected!("avx512vl")
            }
            #[cfg(not(target_arch = "x86_64"))]
            _ => false,
        }
    }

    /// Whether a fused multiply-add is an instruction in code compiled for this set.
    #[must_use]
    pub fn has_fused(self) -> bool {
        let baseline = cfg!(any(target_feature = "fma", target_arch = "aarch64"));
        baseline || self != InstructionSet::Baseline
    }
}

/// Work that is compiled for every instruction set and arithmetic class.
pub(crate) trait Task {
    type Output;

    /// Does the work; `#[inline(always)]`, like all that it calls.
    fn run<A: Arith>(self) -> Self::Output;
}

/// An available instruction set and an arithmetic class it can run at speed.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Target {
    set: InstructionSet,
    class: ArithmeticClass,
}

impl Target {
    /// The target for a wish: a set this processor lacks becomes its best one, and the fused
    /// class without a hardware instruction becomes the unfused one.
    pub(crate) fn new(set: Option<InstructionSet>, class: ArithmeticClass) -> Target {
        let set = set.filter(|set| set.is_available());
        let set = set.unwrap_or_else(InstructionSet::best);
        let class = if set.has_fused() {
            class
        } else {
            ArithmeticClass::Unfused
        };
        Target { set, class }
    }

    /// The class that is used.
    pub(crate) fn class(self) -> ArithmeticClass {
        self.class
    }

    /// Runs a task.
    #[inline]
    pub(crate) fn run<T: Task>(self, task: T) -> T::Output {
        match self.class {
            ArithmeticClass::Fused => self.run_in::<T, Fused>(task),
            ArithmeticClass::Unfused => self.run_in::<T, Unfused>(task),
        }
    }

    #[inline]
    fn run_in<T: Task, A: Arith>(self, task: T) -> T::Output {
        match self.set {
            // SAFETY: `Target::new`, which alone fills the private field, has found the
            // features of the set on this processor.
            #[cfg(target_arch = "x86_64")]
            InstructionSet::Avx512 => unsafe { run_avx512::<T, A>(task) },
            // SAFETY: as above.
            #[cfg(target_arch = "x86_64")]
            InstructionSet::Avx2 => unsafe { run_avx2::<T, A>(task) },
            _ => task.run::<A>(),
        }
    }
}

#[cfg(target_arch = "x86_64")]
#[target_feature(enable = "avx2,fma,avx512f,avx512dq,avx512vl")]
fn run_avx512<T: Task, A: Arith>(task: T) -> T::Output {
    task.run::<A>()
}

#[cfg(target_arch = "x86_64")]
#[target_feature(enable = "avx2,fma")]
fn run_avx2<T: Task, A: Arith>(task: T) -> T::Output {
    task.run::<A>()
}
