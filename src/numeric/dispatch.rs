//! Run-time choice of the widest vector instructions the machine has.
//!
//! The same arithmetic is compiled several times and the widest copy the machine supports is
//! called. No copy fuses a multiplication with an addition and none reorders a sum, so all give
//! the same bytes; only their speed differs.

/// A piece of work to be compiled for several instruction sets.
///
/// `run` must be marked `#[inline(always)]`, and so must what it calls in its inner loops:
/// only code inlined into a copy is compiled for that copy's instruction set.
pub trait Work {
    /// What the work returns.
    type Answer;
    /// Does the work.
    fn run(self) -> Self::Answer;
}

/// Runs `work` with the widest instruction set of this machine.
pub fn widest<W: Work>(work: W) -> W::Answer {
    #[cfg(target_arch = "x86_64")]
    {
        if std::is_x86_feature_detected!("avx512f")
            && std::is_x86_feature_detected!("avx512dq")
            && std::is_x86_feature_detected!("avx512vl")
        {
            // SAFETY: the three features the copy is compiled for were just detected.
            return unsafe { with_avx512(work) };
        }
        if std::is_x86_feature_detected!("avx2") {
            // SAFETY: the feature the copy is compiled for was just detected.
            return unsafe { with_avx2(work) };
        }
    }
    work.run()
}

#[cfg(target_arch = "x86_64")]
#[target_feature(enable = "avx512f,avx512dq,avx512vl")]
fn with_avx512<W: Work>(work: W) -> W::Answer {
    work.run()
}

#[cfg(target_arch = "x86_64")]
#[target_feature(enable = "avx2")]
fn with_avx2<W: Work>(work: W) -> W::Answer {
    work.run()
}

/// Runs `work` with the instruction set every machine of this kind has: the reference the wider
/// copies must agree with.
pub fn narrowest<W: Work>(work: W) -> W::Answer {
    work.run()
}

/// Runs `work` once with every instruction set of this machine for which a copy exists, narrowest
/// first, and says which: what [`widest`] promises can be checked with this.
pub fn each<W: Work + Clone>(work: &W) -> Vec<(&'static str, W::Answer)> {
    let mut answers = vec![("baseline", work.clone().run())];
    #[cfg(target_arch = "x86_64")]
    {
        if std::is_x86_feature_detected!("avx2") {
            // SAFETY: the feature the copy is compiled for was just detected.
            answers.push(("avx2", unsafe { with_avx2(work.clone()) }));
        }
        if std::is_x86_feature_detected!("avx512f")
            && std::is_x86_feature_detected!("avx512dq")
            && std::is_x86_feature_detected!("avx512vl")
        {
            // SAFETY: the three features the copy is compiled for were just detected.
            answers.push(("avx512", unsafe { with_avx512(work.clone()) }));
        }
    }
    answers
}
