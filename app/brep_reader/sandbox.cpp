// Limits of the helper process.
// Times in s, sizes in bytes.
#include "app/brep_reader/sandbox.h"

#include <linux/audit.h>
#include <linux/filter.h>
#include <linux/seccomp.h>
#include <sys/prctl.h>
#include <sys/resource.h>
#include <sys/syscall.h>

#include <array>
#include <csignal>
#include <cstddef>

namespace kf::brep {
namespace {

bool limit(__rlimit_resource resource, rlim_t value) {
  const rlimit both{value, value};
  return setrlimit(resource, &both) == 0;
}

// A list of what is forbidden: the libraries need threads, memory and reading, which stay open. A machine
// whose calls are numbered otherwise is left with the limits alone.
void forbidCalls() {
#if defined(__x86_64__)
  constexpr unsigned kMachine = AUDIT_ARCH_X86_64;
#elif defined(__aarch64__)
  constexpr unsigned kMachine = AUDIT_ARCH_AARCH64;
#else
  constexpr unsigned kMachine = 0;
#endif
  if (kMachine == 0) return;
  constexpr unsigned kForbid = SECCOMP_RET_ERRNO | 1U;  // EPERM
  constexpr std::array kCalls = {SYS_socket,   SYS_socketpair,        SYS_connect,   SYS_bind,
                                 SYS_execve,   SYS_execveat,          SYS_ptrace,    SYS_process_vm_readv,
                                 SYS_unlinkat, SYS_process_vm_writev, SYS_renameat2, SYS_kill};
  std::array<sock_filter, 4 + 2 * kCalls.size() + 1> program{};
  std::size_t n = 0;
  program[n++] = BPF_STMT(BPF_LD | BPF_W | BPF_ABS, offsetof(seccomp_data, arch));
  program[n++] = BPF_JUMP(BPF_JMP | BPF_JEQ | BPF_K, kMachine, 1, 0);
  program[n++] = BPF_STMT(BPF_RET | BPF_K, SECCOMP_RET_ALLOW);
  program[n++] = BPF_STMT(BPF_LD | BPF_W | BPF_ABS, offsetof(seccomp_data, nr));
  for (const long call : kCalls) {
    program[n++] = BPF_JUMP(BPF_JMP | BPF_JEQ | BPF_K, static_cast<unsigned>(call), 0, 1);
    program[n++] = BPF_STMT(BPF_RET | BPF_K, kForbid);
  }
  program[n++] = BPF_STMT(BPF_RET | BPF_K, SECCOMP_RET_ALLOW);
  sock_fprog filter{static_cast<unsigned short>(n), program.data()};
  prctl(PR_SET_SECCOMP, SECCOMP_MODE_FILTER, &filter);
}

}  // namespace

bool enterSandbox(const Sandbox& sandbox) {
  bool good = limit(RLIMIT_CORE, 0) && limit(RLIMIT_CPU, sandbox.cpuSeconds) && limit(RLIMIT_FSIZE, 0);
#if !defined(__SANITIZE_ADDRESS__)  // which reserves terabytes
  good = good && limit(RLIMIT_AS, sandbox.memoryBytes);
#endif
  prctl(PR_SET_PDEATHSIG, SIGKILL);
  if (prctl(PR_SET_NO_NEW_PRIVS, 1, 0, 0, 0) == 0) forbidCalls();
  return good;
}

}  // namespace kf::brep
