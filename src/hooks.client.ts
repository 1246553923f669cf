import { z } from 'zod';

// Zod would otherwise try out eval, which the content security policy reports.
z.config({ jitless: true });
